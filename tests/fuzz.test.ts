import { readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import { setFlagsFromString } from "node:v8";
import { runInNewContext } from "node:vm";
import { describe, expect, it } from "vitest";
import { readReport } from "./factories/format-report";
import { mutate, randomFrom } from "./factories/mutate";
import { tableReport } from "./factories/table-report";

// Mutated files over the readers of XYZ, SDF and tables. A sample with a fixed seed here; `npm run fuzz` reads 100,000.

const FILES = Number(process.env.FUZZ_FILES ?? 1_200);
const SEED = Number(process.env.FUZZ_SEED ?? 20_261_201);
const FOLDER = path.join(import.meta.dirname, "../fixtures/formats");

const seeds = readdirSync(FOLDER)
  .filter((name) => /\.(xyz|extxyz|sdf|mol|csv|tsv|txt)$/.test(name))
  .map((name) => ({ name, bytes: readFileSync(path.join(FOLDER, name)) }))
  .filter(({ bytes }) => bytes.length < 100_000);

/** Numbers that a report says it read; NaN and infinity are none. */
function unreal(report: unknown): boolean {
  if (typeof report === "number") return !Number.isFinite(report);
  if (Array.isArray(report)) return report.some(unreal);
  return typeof report === "object" && report !== null && Object.values(report).some(unreal);
}

setFlagsFromString("--expose-gc");
const collect = runInNewContext("gc") as () => void;

/** Bytes in use once what nobody holds any more is gone. */
function heapBytes(): number {
  collect();
  return process.memoryUsage().heapUsed;
}

describe("mutated files (security E06)", () => {
  it("has seeds of every reader", () => {
    for (const kind of [/xyz$/, /sdf$/, /csv$/]) {
      expect(seeds.filter(({ name }) => kind.test(name)).length).toBeGreaterThan(20);
    }
  });

  it(
    `are read or refused in words, ${FILES.toLocaleString("en-GB")} of them, and none leaves memory behind`,
    () => {
      const random = randomFrom(SEED);
      const failures: string[] = [];
      const start = heapBytes();
      let read = 0;
      for (let k = 0; k < FILES; k++) {
        const seed = seeds[k % seeds.length]!;
        const bytes = mutate(seed.bytes, random);
        const chunk = 1 + Math.floor(random() * 1_000);
        try {
          const report = readReport(seed.name, bytes, chunk);
          if (unreal(report)) failures.push(`${seed.name}, file ${k}: a number that is none`);
          if (!("rejected" in report)) read += 1;
        } catch (error) {
          failures.push(`${seed.name}, file ${k}: ${error instanceof Error ? error.stack : String(error)}`);
        }
      }
      expect(failures.slice(0, 5)).toEqual([]);
      // Not only refusals: the wounds leave most files partly readable.
      expect(read).toBeGreaterThan(FILES / 3);
      expect(heapBytes() - start).toBeLessThan(20e6);
    },
    Math.max(120_000, FILES * 20),
  );
});

// Work that grows with the square of a line's length would need 10^10 steps here and end in the runner's time-out.
describe("long runs of one sign (security E06)", () => {
  const LONG = 200_000;
  const RUNS = [
    " ",
    "\t",
    '"',
    "'",
    "1",
    "a",
    "=",
    "-",
    ".",
    ",",
    "(",
    "[",
    "e",
    "_",
    "{",
    "\\",
    "%",
    "/",
    "a=",
    '" ',
  ];
  const RUNS_OF = RUNS.map((run) => [JSON.stringify(run), run.repeat(LONG / run.length)] as const);
  const atom = "He 0 0 0\n";
  const bytesOf = (text: string) => Buffer.from(text);

  it.each(RUNS_OF)("of %s in an XYZ comment, a count line and an atom line", (_, run) => {
    for (const text of [
      `1\n${run}\n${atom}`,
      `1\nx${run}x=1${run}1 energy=-1\n${atom}`,
      `1\nenergy=${run}\n${atom}1\nx${run}x\n${atom}`,
      `1\nProperties=species:S:1:pos:R:3 note="${run}\n${atom}`,
      `${run}\n\n${atom}`,
      `1\n\nHe ${run} 0 0\n`,
    ]) {
      expect(readReport("E01-run.xyz", bytesOf(text))).toBeTypeOf("object");
    }
  });

  it.each(RUNS_OF)("of %s in an SDF title, field name and value", (_, run) => {
    const block =
      "\n  x\n\n  1  0  0  0  0  0  0  0  0  0999 V2000\n    0.0000    0.0000    0.0000 He  0  0\nM  END\n";
    for (const text of [
      `${run}${block}$$$$\n`,
      `title${block}> <${run}>\n1\n\n$$$$\n`,
      `title${block}>  <E>\n${run}\n\n$$$$\n`,
      `title${block}>x${run}x\n1\n\n$$$$\n`,
      `x${run}x${block}>  <E>\n1${run}x\n\n$$$$\n`,
      `title${block}>${run}\n1\n\n$$$$\n`,
    ]) {
      expect(readReport("run.sdf", bytesOf(text))).toBeTypeOf("object");
    }
  });

  it.each(RUNS_OF)("of %s in a header, a unit and a cell of a table", (_, run) => {
    for (const text of [
      `frame,${run}\n1,2\n`,
      `frame,x${run}x\n1,2\n`,
      `frame,x${run}x [D]\n1,x${run}x\n`,
      `frame,E [${run}]\n1,2\n`,
      `frame,E [kcal/mol]\n1,${run}\n2,"${run}"\n`,
      `${run},E\n1,2\n`,
    ]) {
      expect(tableReport("run.csv", bytesOf(text))).toBeTypeOf("object");
    }
  });
});

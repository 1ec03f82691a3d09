import { readdirSync, readFileSync } from "node:fs";
import path from "node:path";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { mutate, randomFrom } from "../../../tests/factories/mutate";
import { readCountsLine } from "../sdf/counts-line.ts";
import { SdfReader } from "../sdf.server.ts";
import { sniff } from "./sniff.ts";
import { textFormat } from "./text-format.ts";

const FOLDER = path.join(import.meta.dirname, "../../../fixtures/formats");
const bytes = (text: string) => new TextEncoder().encode(text);
const formatOf = (text: string, name = "a.txt") => sniff(bytes(text), name).format;

const atom = (k: number) =>
  `${(1.5 * k).toFixed(4).padStart(10)}    0.0000    0.1173 C   0  0  0  0  0  0  0  0  0  0  0  0`;
const record = (counts: string, atoms: number, title = "a") =>
  [
    title,
    "  Lowlying          3D",
    "",
    counts,
    ...Array.from({ length: atoms }, (_, k) => atom(k)),
    "M  END",
    "$$$$",
    "",
  ].join("\n");
const small = [
  "water",
  "  Lowlying          3D",
  "",
  "  3  2  0  0  0  0            999 V2000",
  "    0.0000    0.0000    0.1173 O   0  0",
  "    0.0000    0.7572   -0.4692 H   0  0",
  "    0.0000   -0.7572   -0.4692 H   0  0",
  "  1  2  1  0",
  "  1  3  1  0",
  "M  END",
  "$$$$",
  "",
].join("\n");

describe("a first record that is larger than the first bytes", () => {
  test.each([
    ["950 atoms and 1,010 bonds", "9501010  0  0  0  0            999 V2000", 950],
    ["1,000 atoms", "1000  0  0  0  0  0            999 V2000", 1_000],
    ["1,000 atoms, no version", "1000  0  0  0  0  0", 120],
    ["counts of asterisks", "***  0  0  0  0  0            999 V2000", 1_000],
    ["bonds of asterisks", "900***  0  0  0  0            999 V2000", 900],
  ])("is held as too large for V2000 (row S06), and the rest is read: %s", (_, counts, atoms) => {
    const file = bytes(record(counts, atoms) + small + small);
    for (const title of ["a.sdf", "a.txt"]) expect(sniff(file, title).format).toBe("sdf");
    const reader = new SdfReader({ file: "a.sdf" });
    const frames = [...reader.push(file), ...reader.end()];
    expect(frames.map(({ problem }) => problem?.code ?? null)).toEqual(["S06", null, null]);
    // As a further record too.
    const second = new SdfReader({ file: "a.sdf" });
    const after = [...second.push(bytes(small + record(counts, atoms))), ...second.end()];
    expect(after.map(({ problem }) => problem?.code ?? null)).toEqual([null, "S06"]);
  });

  test("may have blank lines before it (row S04), no version, a blank title, no title, or a title of digits", () => {
    const large = record("134  0  0  0  0  0            999 V2000", 134);
    for (const blanks of ["", "\n", "\n\n\n"]) {
      expect(formatOf(blanks + large)).toBe("sdf");
      expect(formatOf(blanks + large.replace(/^a/, ""))).toBe("sdf");
      expect(formatOf(blanks + large.replace(/^a/, "12"))).toBe("sdf");
      expect(formatOf(blanks + large.replace(/ {12}999 V2000/, ""))).toBe("sdf");
      expect(formatOf(blanks + large.slice(2))).toBe("sdf");
      expect(formatOf(blanks + large.replaceAll("\n", "\r\n"))).toBe("sdf");
    }
  });

  test("is known by where it ends, or by the name, where its head is damaged", () => {
    const damaged = record("two and no more", 300).replace(/^a/, "12").replaceAll(" C ", " ");
    expect(damaged.length).toBeGreaterThan(8_192);
    expect(formatOf(damaged)).toBe("sdf");
    expect(formatOf(damaged.slice(0, 8_000))).toBe("xyz");
    expect(formatOf(damaged.slice(0, 8_000), "a.sdf")).toBe("sdf");
  });
});

describe("a frame of XYZ", () => {
  const names = ["a.xyz", "a.sdf", "a.mol", "a"];

  test("stays one, whatever its comment says and its name ends in", () => {
    for (const comment of [
      "",
      "  3  2  0  0  0  0            999 V2000",
      "M  END",
      "$$$$",
      "V3000",
      "3  2  0",
    ]) {
      for (const name of names) {
        expect(
          formatOf(`2\n${comment}\nO 0.0 0.0 0.0\nH 0.0 0.0 0.9\n2\n${comment}\nO 0 0 0\nH 0 0 1\n`, name),
        ).toBe("xyz");
        expect(formatOf(`\n\n2\n${comment}\n8 0 0 0\n1 0 0 1\n`, name)).toBe("xyz");
      }
    }
    // Columns of its own, a leading number, commas, no sound number.
    const properties = "Properties=pos:R:3:species:S:1";
    expect(formatOf(`1\n${properties}\n    0.0000    0.0000    0.1173 O\n`, "a.sdf")).toBe("xyz");
    for (const line of [
      "1 C 0 0 0",
      "C, 0.1, 0.2, 0.3",
      "C 0,1 0,2 0,3",
      "C,0.1,0.2,0.3",
      "C1 1.0-100 2x -3",
    ]) {
      expect(formatOf(`1\n\n${line}\n`, "a.sdf")).toBe("xyz");
    }
    // Broken in its first atoms, sound behind.
    expect(formatOf(`3\n\nC *** nan\nC 0 0 0\nC 0 0 1\n`, "a.sdf")).toBe("xyz");
  });

  test("of any numbers, symbols and comments is never taken for a record", () => {
    const coordinate = fc.oneof(
      fc.double({ min: -999, max: 999, noNaN: true }).map((x) => x.toFixed(4).padStart(10)),
      fc.integer({ min: -99, max: 99 }).map(String),
    );
    const line = fc
      .tuple(fc.constantFrom("C", "H", "Cl", "6", "1", "C12", "13C", "X"), coordinate, coordinate, coordinate)
      .map((fields) => fields.join(" "));
    const comment = fc.oneof(
      fc.string(),
      fc.constantFrom("M  END", "$$$$", "  3  2  0  0  0  0            999 V2000"),
    );
    const frame = fc
      .tuple(
        comment.map((text) => text.replace(/[\r\n]/g, "")),
        fc.array(line, { minLength: 1, maxLength: 12 }),
      )
      .map(([text, atoms]) => `${atoms.length}\n${text}\n${atoms.join("\n")}\n`);
    fc.assert(
      fc.property(
        fc.array(frame, { minLength: 1, maxLength: 3 }),
        fc.constantFrom(...names),
        (frames, name) => {
          expect(textFormat(frames.join("").split("\n")).format).toBe("xyz");
          const { refusal, format } = sniff(bytes(frames.join("")), name);
          if (refusal === null) expect(format).toBe("xyz");
        },
      ),
      { seed: 20_261_202, numRuns: 400 },
    );
  });

  test("of the acceptance tables is no record, damaged or not, and a record of theirs stays one", () => {
    const files = readdirSync(FOLDER).filter((name) => /\.(?:xyz|extxyz|sdf|mol)$/.test(name));
    expect(files.length).toBeGreaterThan(150);
    const random = randomFrom(20_261_202);
    for (const name of files) {
      const content = readFileSync(path.join(FOLDER, name));
      const { format, container, refusal } = sniff(content, name);
      if (container !== "none" || refusal !== null) continue;
      // The one fixture whose name is wrong on purpose.
      const isRecord = format === "sdf";
      if (!name.startsWith("G01")) expect([name, isRecord]).toEqual([name, /\.(?:sdf|mol)$/.test(name)]);
      for (let k = 0; k < 20 && !isRecord; k++) {
        const damaged = mutate(content, random);
        // What is left of a few atoms beside the end of a record may be either.
        if (/\$\$\$\$|M {2}(?:END|V30)/.test(String(damaged))) continue;
        expect([name, sniff(damaged, "a.xyz").format]).not.toEqual([name, "sdf"]);
      }
    }
  });
});

test("a counts line of asterisks had more than its columns hold", () => {
  expect(readCountsLine("******  0  0  0  0            999 V2000")).toEqual({ kind: "overflow" });
  expect(readCountsLine("  2***  0  0  0  0            999 V2000")).toEqual({ kind: "overflow" });
  expect(readCountsLine("  2  **  0  0  0  0            999 V2000")).toBeNull();
});

import { existsSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { DomainError } from "./errors.ts";
import { EnergyScan } from "./intake/energies.ts";
import type { XyzFrame } from "./xyz/frame.ts";
import { readXyz, type XyzOptions, XyzReader } from "./xyz.server.ts";

const encoder = new TextEncoder();
const WATER = "O 0.0000 0.0000 0.1173\nH 0.0000 0.7572 -0.4692\nH 0.0000 -0.7572 -0.4692\n";
const frame = (comment: string, atoms = WATER, count = 3) => `${count}\n${comment}\n${atoms}`;

function read(text: string | Uint8Array, options: Partial<XyzOptions> = {}, cuts: readonly number[] = []) {
  const bytes = typeof text === "string" ? encoder.encode(text) : text;
  const edges = [0, ...cuts.map((cut) => cut % (bytes.length + 1)).sort((a, b) => a - b), bytes.length];
  const reader = new XyzReader({ file: "a.xyz", ...options });
  const frames: XyzFrame[] = [];
  for (let k = 0; k + 1 < edges.length; k++)
    frames.push(...reader.push(bytes.subarray(edges[k], edges[k + 1])));
  frames.push(...reader.end());
  return { frames, summary: reader.summary() };
}

/** The outcome, refusals included, as data. */
function outcome(text: string | Uint8Array, cuts: readonly number[] = []): unknown {
  try {
    return read(text, {}, cuts);
  } catch (error) {
    if (error instanceof DomainError) return { refused: error.message };
    throw error;
  }
}

/** A file of all styles, sound and broken. */
const MIXED = [
  frame("energy=-1.5 name=a"),
  "\n",
  frame('Properties=species:S:1:pos:R:3:q:R:1 name="b c"', WATER.replace(/\n/g, " 0.5\n")),
  frame("c", WATER.replace("-0.7572", "nan")),
  "3\nd\nO 0 0 0.1\n\n",
  frame("e é"),
  frame("f", `${WATER}H 1 2 3\n`),
  frame("g", "C1 0 0 0\n13C 0 0 1.5\nX 3 3 3\n"),
  "1500.2 1600.3\n",
  frame("h", WATER.replace(/ /g, ", ")),
  "3 angstrom\ni\n",
  WATER,
  frame("j", "6 0 0 0\n8 0 0 1.2\n", 2),
  "3\nk\nO 0 0 0\n",
].join("");

describe("any way of cutting and ending lines gives the same", () => {
  test("chunks", () => {
    const whole = outcome(MIXED);
    fc.assert(
      fc.property(fc.array(fc.nat(2000), { maxLength: 12 }), (cuts) => {
        expect(outcome(MIXED, cuts)).toEqual(whole);
      }),
      { seed: 41, numRuns: 300 },
    );
    const every = Array.from({ length: encoder.encode(MIXED).length }, (_, k) => k);
    expect(outcome(MIXED, every)).toEqual(whole);
  });

  test.each(["\r\n", "\r"])("line ends %j", (end) => {
    const every = Array.from({ length: 2000 }, (_, k) => k);
    expect(outcome(MIXED.replaceAll("\n", end))).toEqual(outcome(MIXED));
    expect(outcome(MIXED.replaceAll("\n", end), every)).toEqual(outcome(MIXED));
  });

  test("no end of line at the end of the file", () => {
    expect(outcome(MIXED.replace(/\n$/, ""))).toEqual(outcome(MIXED));
  });

  test("a stream gives the frames of the reader, and its summary", async () => {
    async function* chunks() {
      yield encoder.encode(MIXED);
    }
    const frames: XyzFrame[] = [];
    const stream = readXyz(chunks(), { file: "a.xyz" });
    for (;;) {
      const { done, value } = await stream.next();
      if (done) {
        expect({ frames, summary: value }).toEqual(outcome(MIXED));
        return;
      }
      frames.push(value);
    }
  });
});

/**
 * Rows X08 to X11 as the page writes them, on an array of all lines and with no thought of memory: the yardstick for
 * the search that sees each line once.
 */
function yardstick(lines: readonly string[]): string[] {
  const isAtom = (line: string | undefined) => line !== undefined && /^[CH] \d \d \d$/.test(line);
  const count = (line: string | undefined) => (/^\d$/.test(line ?? "") ? Number(line) : null);
  const whole = (s: number) => {
    const n = count(lines[s]);
    if (n === null || n === 0 || s + n + 2 > lines.length) return false;
    return lines.slice(s + 2, s + 2 + n).every(isAtom);
  };
  const starts = (s: number) => (count(lines[s]) ?? 0) > 0 && isAtom(lines[s + 2]);
  const find = (from: number, holds: (s: number) => boolean) => {
    for (let s = from; s < lines.length; s++) if (holds(s)) return s;
    return lines.length;
  };
  const frames: string[] = [];
  const held = (code: string, at: number, next: number) => {
    frames.push(`${code} ${at + 1}-${next}`);
    return next;
  };
  let at = 0;
  while (at < lines.length) {
    if (lines[at] === "") {
      at += 1;
      continue;
    }
    const n = count(lines[at])!;
    let k = at + 2;
    while (k < at + 2 + n && isAtom(lines[k])) k += 1;
    if (n > 0 && k >= lines.length && k < at + 2 + n) {
      held("X09", at, lines.length);
      break;
    }
    if (k < at + 2 + n) {
      const code = n > 0 && lines.slice(k).every((line) => line === "") ? "X09" : "X08";
      at = held(code, at, find(k, whole));
      continue;
    }
    let next = k;
    while (lines[next] === "") next += 1;
    if (isAtom(lines[next])) {
      at = held("X10", at, find(next, whole));
      continue;
    }
    frames.push(`${n === 0 ? "X04" : "ok"} ${at + 1}-${Math.min(k, lines.length)}`);
    at = next >= lines.length || count(lines[next]) !== null ? next : find(next, starts);
  }
  return frames;
}

test("broken ranges end where the page says, for any order of lines", () => {
  const line = fc.constantFrom(
    "1",
    "2",
    "3",
    "2",
    "0",
    "",
    "some words",
    "C 0 0 0",
    "H 0 0 1",
    "H 0 1 0",
    "C 1 0 0",
  );
  fc.assert(
    fc.property(
      fc.constantFrom("1", "2", "3"),
      fc.array(line, { minLength: 1, maxLength: 24 }),
      (first, rest) => {
        const lines = [first, ...rest];
        const { frames } = read(`${lines.join("\n")}\n`);
        const found = frames.map(
          (one) => `${one.problem?.code ?? "ok"} ${one.line}-${one.line + one.lineCount - 1}`,
        );
        expect(found).toEqual(yardstick(lines));
      },
    ),
    { seed: 43, numRuns: 8000 },
  );
}, 60_000);

test("what is odd about a comment is one message a frame", () => {
  const { frames } = read(frame(`Properties=species:S:1:pos:R:3 converged name='a b' x=1 x=2 final`));
  expect(frames[0]?.remarks).toMatchObject([
    {
      code: "X33",
      line: 2,
      found: "converged, name, x",
      message:
        "A key stands without a value and is read as true; a value in single quotes is read as text; a key stands twice, and the last one counts.",
    },
  ]);
});

test("a typographic minus in a number of the comment is told too, in a word it is not", () => {
  const told = (comment: string) =>
    read(frame(comment)).frames[0]?.remarks.map(({ code, line }) => [code, line]);
  expect(told("energy=\u22121.5")).toEqual([["G14", 2]]);
  expect(told("C\u2212C energy=-1.5")).toEqual([]);
});

describe("a file that is cut", () => {
  const whole = frame("a") + frame("b");

  test("anywhere inside of its last frame says so, whatever the last line still holds", () => {
    const from = frame("a").length + "3\nb\n".length;
    // The last number may lose digits and stay a number: nobody can tell.
    const to = whole.length - "0.4692\n".length;
    for (let end = from; end < to; end++) {
      const { frames } = read(whole.slice(0, end));
      expect(
        frames.map(({ problem }) => problem?.code ?? "sound"),
        JSON.stringify(whole.slice(0, end)),
      ).toEqual(["sound", "X09"]);
    }
  });

  test("names the line that it ends in, and counts whole atoms only", () => {
    const { frames } = read(whole.slice(0, -10));
    expect(frames[1]?.problem).toMatchObject({
      code: "X09",
      frame: 2,
      line: 10,
      found: "H 0.0000 -0.757",
      message: "Frame 2 has 2 of its 3 atoms; then the file ends in the middle of a line.",
    });
  });

  test("between two lines is named by the count line, blank lines behind or not", () => {
    for (const end of ["", "\n", "\n \n\n"]) {
      const { frames } = read(`${frame("a")}3\nb\nO 0 0 0${end}`);
      expect(frames[1]?.problem).toMatchObject({ code: "X09", line: 6 });
      expect(frames[1]?.problem?.message).toContain("has 1 of its 3 atoms; then the file ends.");
    }
  });

  test("is not a file with a broken line at its end", () => {
    const { frames } = read(`${frame("a")}3\nb\nO 0 0 0\nH 0 0 1\nH 0 0\n`);
    expect(frames[1]?.problem?.code).toBe("X24");
    expect(read(`${frame("a")}3\nb\nO 0 0 0\nwords of their own\n`).frames[1]?.problem?.code).toBe("X08");
  });
});

// `FUZZ_RUNS=100000 npx vitest run app/lib/xyz.server.test.ts` for the long run.
const RUNS = Number(process.env.FUZZ_RUNS ?? 2000);

describe("random damage", () => {
  test("never crashes, loses no frame number, and does not depend on chunks", () => {
    let state = 4711;
    const random = (below: number) => {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      return Math.floor((state / 2 ** 32) * below);
    };
    const base = encoder.encode(MIXED);
    const spice = encoder.encode('\n\r\t ,.-+*^"=[]{}\\eEdD0123456789CHX@\u00e9\u2212');
    for (let run = 0; run < RUNS; run++) {
      const bytes = [...base];
      for (let hit = 0; hit < 1 + random(6); hit++) {
        const at = random(bytes.length);
        const kind = random(5);
        if (kind === 0) bytes[at] = random(256) || 1;
        else if (kind === 1) bytes.splice(at, 1 + random(30));
        else if (kind === 2)
          bytes.splice(at, 0, ...Array.from({ length: random(8) }, () => spice[random(spice.length)]!));
        else if (kind === 3) bytes.splice(at, 0, ...bytes.slice(at, at + random(60)));
        else bytes[at] = spice[random(spice.length)]!;
      }
      const damaged = Uint8Array.from(bytes.slice(0, random(10) === 0 ? random(bytes.length) : bytes.length));
      const whole = outcome(damaged);
      expect(outcome(damaged, [random(500), random(500), random(500)])).toEqual(whole);
      if (typeof whole === "object" && whole !== null && "frames" in whole) {
        const { frames } = whole as { frames: XyzFrame[] };
        expect(frames.map((one) => one.number)).toEqual(frames.map((_, k) => k + 1));
        for (const [k, one] of frames.entries()) {
          const next = frames[k + 1]?.line ?? Number.POSITIVE_INFINITY;
          expect(one.line + one.lineCount).toBeLessThanOrEqual(next);
          expect(one.positions.length).toBe(one.problem ? 0 : 3 * one.elements.length);
          expect(one.positions.every(Number.isFinite)).toBe(true);
        }
      }
    }
  }, 3_600_000);
});

describe("limits stop early and name limit and value", () => {
  const many = (count: number) => frame("a").repeat(count);

  test("frames, over several files", () => {
    expect(read(many(5), { limits: { frames: 5 } }).frames).toHaveLength(5);
    expect(() => read(many(6), { limits: { frames: 5 } })).toThrow(
      /a.xyz, line 26, frame 6: the limit is 5 frames, and frame 6 begins here/,
    );
    expect(() => read(many(3), { limits: { frames: 5 }, firstNumber: 4 })).toThrow(/frame 6 begins here/);
  });

  test("atoms, before they are read", () => {
    expect(read(frame("a"), { limits: { atoms: 3 } }).frames[0]?.problem).toBeNull();
    expect(() => read("4\na\n", { limits: { atoms: 3 } })).toThrow(
      /line 1, frame 1: the limit is 3 atoms a frame, and this frame announces more \("4"\)/,
    );
    expect(() => read("99999999999999999999\na\n")).toThrow(/the limit is 1,000 atoms/);
  });

  test("columns", () => {
    const atom = (columns: number) => `1\na\nC 0 0 0${" 1".repeat(columns - 4)}\n`;
    expect(read(atom(1000)).frames[0]?.extra).toHaveLength(996);
    expect(() => read(atom(1001))).toThrow(/the limit is 1,000 columns/);
    expect(() => read("1\nProperties=species:S:1:pos:R:3:q:R:997\nC 0 0 0\n")).toThrow(
      /the limit is 1,000 columns/,
    );
  });

  test("a refusal carries its row and its place", () => {
    const error = (() => {
      try {
        return read("4\na\n", { limits: { atoms: 3 } });
      } catch (thrown) {
        return thrown;
      }
    })();
    expect(error).toBeInstanceOf(DomainError);
    expect(error).toMatchObject({
      code: "invalid",
      extra: { code: "G11" },
      report: { severity: "reject", line: 1 },
    });
  });
});

test("a long comment in any style is read once, and within the stack", () => {
  const fillers = ["1 ", '"', "[", "a=", "a:1 ", "Properties ", "' ", "\\", "a=[1,2] ", "E (kcal/mol) "];
  for (const filler of fillers) {
    const comment = filler.repeat(Math.floor(300_000 / filler.length));
    const { frames } = read(`1\n${comment}\nC 0 0 0\n1\nLattice="${comment}"\nC 0 0 0\n`);
    expect(frames).toHaveLength(2);
    const scan = new EnergyScan();
    for (const one of frames) scan.add(one, one.comment);
    expect(scan.finish().candidates.length).toBeLessThan(200);
  }
}, 60_000);

test("frames are numbered on through several files", () => {
  const { frames } = read(frame("a") + frame("b", WATER.replace("0.7572", "x")), { firstNumber: 41 });
  expect(frames.map((one) => one.number)).toEqual([41, 42]);
  expect(frames[1]?.problem).toMatchObject({
    code: "X23",
    frame: 42,
    line: 9,
    atom: 2,
    column: 10,
    found: "x",
  });
});

test("frames of equal elements share one array; coordinates are each frame's own", () => {
  const { frames } = read(frame("a") + frame("b"));
  expect(frames[1]?.elements).toBe(frames[0]?.elements);
  expect(frames[1]?.positions).not.toBe(frames[0]?.positions);
});

test("numbers round as the engine rounds them, whatever their digits", () => {
  const coordinate = fc.oneof(
    fc.double({ noNaN: true, noDefaultInfinity: true }).map(String),
    fc
      .tuple(fc.integer({ min: -30, max: 30 }), fc.bigInt({ min: 0n, max: 10n ** 18n - 1n }))
      .map(([a, b]) => `${a}.${b}`),
  );
  fc.assert(
    fc.property(coordinate, coordinate, coordinate, (x, y, z) => {
      const { frames } = read(`2\n\nHe ${x} ${y} ${z}\nC ${z} ${x} ${y}\n`);
      expect([...frames[0]!.positions]).toEqual([x, y, z, z, x, y].map(Number));
    }),
    { seed: 47, numRuns: 2000 },
  );
});

const reference = fileURLToPath(new URL("../../../shared/reference/", import.meta.url));

describe.skipIf(!existsSync(reference))("reference ensembles beside the checkout", () => {
  // Frames and atoms as reference/README.md lists them.
  test.each([
    ["alkane-conformers/hexane.published.xyz", 12, 20],
    ["cysteine-conformers/cysteine.hf-def2-svp.xyz", 11, 14],
    ["ac-ala-levels/ac-ala-nhme.mp2-cc-pvdz.xyz", 7, 22],
    ["ensembles/difluoroethane.xyz", 200, 8],
    ["ensembles/ac-ala-nhme.xyz", 300, 22],
    ["ensembles/ac-ala-nhme-loose.xyz", 250, 22],
    ["ensembles/aryl-ether.xyz", 300, 38],
    ["ensembles/aminoester.xyz", 1000, 42],
    ["ensembles/aminoester.uff.xyz", 1000, 42],
  ])("%s: %i frames of %i atoms, nothing held, nothing to remark", (name, frames, atoms) => {
    const result = read(readFileSync(reference + name));
    expect(result.summary).toMatchObject({ frames, held: 0, messages: [] });
    expect(result.frames.every((one) => one.elements.length === atoms && one.remarks.length === 0)).toBe(
      true,
    );
  });
});

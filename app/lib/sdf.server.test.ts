import { readFileSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { atomLine, record, record3000, WATER } from "../../tests/factories/mol.ts";
import { readSdf as readPlainly } from "../../tests/factories/read-xyz.ts";
import { fixtures } from "../../tests/factories/reference.ts";
import { DomainError } from "./errors.ts";
import { isSdfFrame, type SdfFrame } from "./sdf/frame.ts";
import { readSdf, SdfReader } from "./sdf.server.ts";
import type { XyzOptions } from "./xyz.server.ts";

const encoder = new TextEncoder();

function read(text: string | Uint8Array, options: Partial<XyzOptions> = {}, cuts: readonly number[] = []) {
  const bytes = typeof text === "string" ? encoder.encode(text) : text;
  const edges = [0, ...cuts.map((cut) => cut % (bytes.length + 1)).sort((a, b) => a - b), bytes.length];
  const reader = new SdfReader({ file: "a.sdf", ...options });
  const frames: SdfFrame[] = [];
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

const V30_ATOMS = [
  "3 O 0 0 0.117301234567 0",
  "1 H 0 0.7572 -0.4692 0 -\nM  V30 MASS=2",
  "9 H 0 -0.7572 -0.4692 0",
];
const V30_BONDS = ["1 1 3 1", "2 1 3 9"];

/** A file of all styles, sound and broken. */
const MIXED = [
  "\n",
  record("a", { data: "> <E>\n-1.5\n\n> <E>\n-1.6\n\n" }),
  record(""),
  record("é", { extra: "M  CHG  1   1   1\nA    2\nHa\n" }),
  record("b").replace("-0.7572", "    nan"),
  record("c").replace("M  END\n", ""),
  record("d").replace("O   0  0", "O   0  5"),
  record3000("e", V30_ATOMS, V30_BONDS, "> <long>\nx\ny\n \nz\n\n"),
  record3000("f", V30_ATOMS, ["1 1 3 1", "2 1 3 4"]),
  "stray\n$$$$\n",
  record("g").replace(" V2000", ""),
  record("h", { program: "  Lowlying          2D" }).replace(/V2000[\s\S]*?(?= {2}1)/, (atoms) =>
    atoms.replace(/0\.1173|-0\.4692/g, (z) => "0.0000".padStart(z.length)),
  ),
  record("i").replace("$$$$\n", ""),
].join("");

describe("any way of cutting and ending lines gives the same", () => {
  test("the file holds all kinds of records", () => {
    const { frames } = read(MIXED);
    const states = frames.map((frame) => frame.problem?.code ?? (frame.remarks[0]?.code || "ok"));
    expect(states).toEqual(["S04", "ok", "S12", "X23", "S14", "ok", "S17", "S05", "S14", "S02", "S11", "ok"]);
  });

  test("chunks", () => {
    const whole = outcome(MIXED);
    fc.assert(
      fc.property(fc.array(fc.nat(6000), { maxLength: 12 }), (cuts) => {
        expect(outcome(MIXED, cuts)).toEqual(whole);
      }),
      { seed: 61, numRuns: 150 },
    );
    const every = Array.from({ length: encoder.encode(MIXED).length }, (_, k) => k);
    expect(outcome(MIXED, every)).toEqual(whole);
  }, 60_000);

  test.each(["\r\n", "\r"])("line ends %j", (end) => {
    const every = Array.from({ length: 6000 }, (_, k) => k);
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
    const frames: SdfFrame[] = [];
    const stream = readSdf(chunks(), { file: "a.sdf" });
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

describe("random damage", () => {
  test("never crashes, loses no frame number, and does not depend on chunks", () => {
    let state = 4711;
    const random = (below: number) => {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      return Math.floor((state / 2 ** 32) * below);
    };
    const base = encoder.encode(MIXED);
    const spice = encoder.encode('\n\r\t ,.-+$><"=()[]MVENDCHGISORAD0123456789*\u00e9\u2212');
    for (let run = 0; run < 800; run++) {
      const bytes = [...base];
      for (let hit = 0; hit < 1 + random(6); hit++) {
        const at = random(bytes.length);
        const kind = random(5);
        if (kind === 0) bytes[at] = random(256) || 1;
        else if (kind === 1) bytes.splice(at, 1 + random(30));
        else if (kind === 2)
          bytes.splice(at, 0, ...Array.from({ length: random(8) }, () => spice[random(spice.length)]!));
        else if (kind === 3) bytes.splice(at, 0, ...bytes.slice(at, at + random(90)));
        else bytes[at] = spice[random(spice.length)]!;
      }
      const damaged = Uint8Array.from(bytes.slice(0, random(10) === 0 ? random(bytes.length) : bytes.length));
      const whole = outcome(damaged);
      expect(outcome(damaged, [random(6000), random(6000), random(6000)])).toEqual(whole);
      if (typeof whole === "object" && whole !== null && "frames" in whole) {
        checkFrames((whole as { frames: SdfFrame[] }).frames);
      }
    }
  }, 60_000);
});

function checkFrames(frames: readonly SdfFrame[]): void {
  expect(frames.map((one) => one.number)).toEqual(frames.map((_, k) => k + 1));
  for (const [k, one] of frames.entries()) {
    const atoms = one.elements.length;
    expect(one.line + one.lineCount).toBeLessThanOrEqual(frames[k + 1]?.line ?? Number.POSITIVE_INFINITY);
    expect(one.positions.length).toBe(one.problem ? 0 : 3 * atoms);
    expect(one.positions.every(Number.isFinite)).toBe(true);
    expect(one.bonds.every((atom) => atom >= 0 && atom < atoms)).toBe(true);
    if (one.orders) expect(one.orders.length).toBe(one.bonds.length / 2);
  }
}

describe("the fast path and the slow one", () => {
  /** Ten columns as a writer may fill them. */
  const column = fc.oneof(
    fc.double({ min: -9999, max: 99999, noNaN: true }).map((x) => x.toFixed(4)),
    fc.tuple(fc.integer({ min: -9999, max: 9999 }), fc.nat(4)).map(([x, d]) => (x / 10 ** d).toFixed(d)),
    fc.constantFrom("0.0000", "-0.0000", "0", "-0", ".5", "-.25", "12.", "1234567890", "+1.5", "1e-3", "1D2"),
    fc.constantFrom("", ".", "-", "1.2.3", "1 2", "x", "--1", "1-"),
  );
  const aligned = fc.tuple(column, fc.boolean()).map(([text, left]) => {
    return left ? text.padEnd(10) : text.padStart(10);
  });
  const tail = fc.constantFrom(
    " 0  0  0  0  0  0  0  0  0  0  0  0",
    " 0  0",
    "",
    " 0  0  0  0  0 15",
    " 1  0",
    " 0  0  0  x",
    "00000000000",
  );

  test("give the same doubles, or the same words on what is wrong", () => {
    const symbol = fc.constantFrom("He ", "NE ", "ar ", "Kr1", "  N", "H  ", "");
    fc.assert(
      fc.property(aligned, aligned, aligned, symbol, tail, (x, y, z, name, rest) => {
        const bad = `${x}${y}${z} ${name}${rest}\n`;
        const text = record("a", { bonds: [] })
          .replace(/ {4}0\.0000[\s\S]*(?=M {2}END)/, bad + bad)
          .replace("  3  0", "  2  0");
        const every = Array.from({ length: text.length }, (_, k) => k);
        expect(outcome(text, every)).toEqual(outcome(text));
      }),
      { seed: 62, numRuns: 800 },
    );
  }, 60_000);

  test("a line that ends behind its symbol does not reach into the next", () => {
    const short = "    0.0000    0.0000    0.0000 C";
    for (const next of ["          0", "  0  0  0  0", "", "    0.0000    0.0000    0.0000 C   0  0"]) {
      const text = record("a", { bonds: [], atoms: [] })
        .replace("  0  0", "  2  0")
        .replace("M  END", `${short}\n${next}\nM  END`);
      const every = Array.from({ length: text.length }, (_, k) => k);
      expect(outcome(text, every)).toEqual(outcome(text));
    }
  });

  test("say the same of V3000 lines", () => {
    const number = fc.oneof(
      fc.double({ noNaN: true, noDefaultInfinity: true }).map(String),
      fc
        .tuple(fc.integer({ min: -99, max: 99 }), fc.bigInt({ min: 0n, max: 10n ** 18n - 1n }))
        .map((p) => p.join(".")),
      fc.constantFrom(
        "0",
        "-0",
        ".5",
        "5.",
        "1.2.3",
        "",
        "-",
        "x",
        "1e5",
        "0.1234567890123456789",
        "9007199254740993",
      ),
    );
    const atom = fc.constantFrom("He", "H", "C1", "NE", "*", "Zz", "C", "");
    const end = fc.constantFrom(" 0", "", " 0 CHG=1", " 0 ", " 1", " 0 -\nM  V30 MASS=3");
    const index = fc.constantFrom("1", "2", "7", "01", "x");
    fc.assert(
      fc.property(number, number, number, atom, end, index, (x, y, z, symbol, rest, k) => {
        const line = `${symbol} ${x} ${y} ${z}${rest}`;
        const text = record3000("a", [`${k} ${line}`, `2 ${line}`, "3 He 0 0 0 0"], ["1 1 3 2", "2 2 1 3"]);
        const every = Array.from({ length: text.length }, (_, at) => at);
        expect(outcome(text, every)).toEqual(outcome(text));
      }),
      { seed: 65, numRuns: 800 },
    );
  }, 60_000);

  test("numbers in columns are those of the engine", () => {
    const coordinate = fc.double({ min: -9999, max: 99999, noNaN: true }).map((x) => x.toFixed(4));
    fc.assert(
      fc.property(coordinate, coordinate, coordinate, (x, y, z) => {
        const line = `${[x, y, z].map((text) => text.padStart(10)).join("")} He  0  0\n`;
        const text = record("a", { bonds: [], atoms: [] })
          .replace("  0  0", "  1  0")
          .replace("M  END", `${line}M  END`);
        expect([...read(text).frames[0]!.positions]).toEqual([x, y, z].map(Number));
      }),
      { seed: 63, numRuns: 1000 },
    );
  });
});

describe("limits stop early and name limit and value", () => {
  const many = (count: number) => record("a").repeat(count);

  test("frames, over several files", () => {
    expect(read(many(5), { limits: { frames: 5 } }).frames).toHaveLength(5);
    expect(() => read(many(6), { limits: { frames: 5 } })).toThrow(
      /a.sdf, line 59, frame 6: the limit is 5 frames, and frame 6 begins here/,
    );
    expect(() => read("\n$$$$\n".repeat(6), { limits: { frames: 5 } })).toThrow(/the limit is 5 frames/);
    expect(() => read(many(3), { limits: { frames: 5 }, firstNumber: 4 })).toThrow(/frame 6 begins here/);
  });

  test("atoms, before they are read, in both versions", () => {
    expect(read(record("a"), { limits: { atoms: 3 } }).frames[0]?.problem).toBeNull();
    expect(() => read(record("a"), { limits: { atoms: 2 } })).toThrow(
      /line 4, frame 1: the limit is 2 atoms a frame, and this frame announces more \("3"\)/,
    );
    const large = record3000("a", V30_ATOMS, V30_BONDS).replace("COUNTS 3", "COUNTS 999999999");
    expect(() => read(large)).toThrow(/line 6, frame 1: the limit is 1,000 atoms/);
  });

  test("fields, bonds and data take no more memory than they fill", () => {
    const field = (k: number) => `> <f${k}>\n1\n\n`;
    const fields = Array.from({ length: 1001 }, (_, k) => field(k)).join("");
    expect(() => read(record("a", { data: fields }))).toThrow(/the limit is 1,000 data fields a record/);
    const bonds = record3000("a", V30_ATOMS, V30_BONDS).replace("COUNTS 3 2", "COUNTS 3 999999999");
    expect(read(bonds).frames[0]?.problem?.code).toBe("S05");
    const long = record("a", { data: `> <A>\n${`${"x".repeat(1000)}\n`.repeat(1500)}\n` });
    const [frame] = read(long).frames;
    expect(frame?.remarks.map((remark) => remark.code)).toEqual(["S16"]);
    expect(frame?.fields.get("A")?.[0]?.length).toBeLessThan(1.05 * 2 ** 20);
  });

  test("a line over 1 MiB, joined ones included", () => {
    expect(() => read(record("x".repeat(1024 * 1024 + 1)))).toThrow(/longer than the limit of 1 MiB/);
    const dashes = `M  V30 ${"x".repeat(60_000)}-\n`.repeat(20);
    const text = record3000("a", V30_ATOMS, V30_BONDS).replace(
      "M  V30 BEGIN ATOM\n",
      `${dashes}M  V30 BEGIN ATOM\n`,
    );
    expect(read(text).frames[0]?.problem?.code).toBe("G11");
  });

  test("lines made to be slow take no longer than their length asks", () => {
    const mean = [
      "<".repeat(500_000),
      `${"<>".repeat(250_000)}`,
      " ".repeat(500_000),
      "M  END".padEnd(500_000, " "),
    ];
    for (const line of mean) {
      const { frames } = read(record("a", { data: `>${line}x\n${line}x\n\n` }));
      expect(frames).toHaveLength(1);
    }
  }, 60_000);
});

test("frames are numbered on through several files", () => {
  const { frames } = read(record("a") + record("b").replace("0.7572", "x.7572"), { firstNumber: 41 });
  expect(frames.map((one) => one.number)).toEqual([41, 42]);
  expect(frames[1]?.problem).toMatchObject({ code: "S01", frame: 42, line: 17, atom: 2, column: 11 });
});

test("records of one molecule share elements, bonds and orders; coordinates are each frame's own", () => {
  const { frames } = read(
    record("a") + record("b") + record("c", { extra: "M  CHG  1   1   1\nM  RAD  1   1   2\n" }),
  );
  const [a, b, c] = frames as [SdfFrame, SdfFrame, SdfFrame];
  expect(b.elements).toBe(a.elements);
  expect(b.bonds).toBe(a.bonds);
  expect(b.orders).toBe(a.orders);
  expect(b.positions).not.toBe(a.positions);
  expect([a.charge, c.charge, c.multiplicity]).toEqual([0, 1, 2]);
  expect(isSdfFrame(a)).toBe(true);
});

test("a record after a larger one does not see its atoms", () => {
  const small = record("b", { atoms: [{ symbol: "He", at: [0, 0, 0] }], bonds: [] });
  const { frames } = read(record("a") + small + record("c"));
  expect(frames.map((frame) => [...frame.elements])).toEqual([[8, 1, 1], [2], [8, 1, 1]]);
  expect(frames.map((frame) => [...frame.bonds])).toEqual([[0, 1, 0, 2], [], [0, 1, 0, 2]]);
});

test("atoms of V3000 stand in the order of their indices, bonds and masses with them", () => {
  const [frame] = read(record3000("a", V30_ATOMS, V30_BONDS)).frames;
  expect([...frame!.elements]).toEqual([1, 8, 1]);
  expect([...frame!.bonds]).toEqual([0, 1, 1, 2]);
  expect([...frame!.isotopes!]).toEqual([2, 0, 0]);
  expect([...frame!.positions]).toEqual([0, 0.7572, -0.4692, 0, 0, 0.117301234567, 0, -0.7572, -0.4692]);
});

test("V3000 numbers are those of the engine, to the last digit", () => {
  const double = fc.double({ noNaN: true, noDefaultInfinity: true });
  fc.assert(
    fc.property(double, double, double, (x, y, z) => {
      const [a, b, c] = [x, y, z].map((value) => (Object.is(value, -0) ? "-0" : String(value)));
      const text = record3000("a", [`1 He ${a} ${b} ${c} 0`, `2 Ne ${c} ${a} ${b} 0`], []);
      expect([...read(text).frames[0]!.positions]).toEqual([x, y, z, z, x, y]);
    }),
    { seed: 64, numRuns: 500 },
  );
});

test("a file cut short keeps what came before", () => {
  const text = record("a") + record("b");
  for (let cut = record("a").length + 2; cut < text.length - 12; cut++) {
    const { frames } = read(text.slice(0, cut));
    expect(frames).toHaveLength(2);
    expect(frames[0]?.problem).toBeNull();
    expect(frames[1]?.problem?.code).toBeOneOf(["S14", "S01"]);
  }
});

test("other content is refused or held, never read", () => {
  expect(() => read("")).toThrow(/no frames/);
  expect(() => read("\n\n\n\n\n\n")).toThrow(/no frames/);
  expect(() => read(`a\0${record("b")}`)).toThrow(/NUL/);
  expect(read("one\ntwo\nthree\nfour\nfive\n").frames.map((frame) => frame.problem?.code)).toEqual(["S01"]);
  expect(atomLine(WATER[0]!)).toHaveLength(70);
});

test("the reference ensemble of N-butyl-4-methylbenzenesulfonamide, as split by hand", () => {
  // 400 records of 32 atoms: fixtures/README.md.
  const path = `${fixtures}ensembles/tosylamide.sdf`;
  const { frames, summary } = read(readFileSync(path));
  expect(summary).toMatchObject({ frames: 400, held: 0, messages: [] });
  expect(frames.flatMap((frame) => frame.remarks)).toEqual([]);
  const plain = readPlainly(path, "MMFF94_ENERGY_KCAL_MOL");
  expect([...frames[0]!.elements]).toEqual([...plain.elements]);
  expect(frames.flatMap((frame) => [...frame.positions])).toEqual([...plain.block.positions]);
  expect(frames.map((frame) => frame.fields.get("MMFF94_ENERGY_KCAL_MOL")?.[0])).toEqual(plain.comments);
  expect(frames.map((frame) => frame.label)).toEqual(
    frames.map((_, k) => `conf_${String(k + 1).padStart(4, "0")}`),
  );
  expect([...frames[0]!.orders!].filter((order) => order === 2)).toHaveLength(5);
  expect(new Set(frames.map((frame) => frame.bonds)).size).toBe(1);
});

import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  areShieldings,
  asideWords,
  type MeasuredState,
  measuredIn,
  measuredRecord,
  measuredState,
  nothingMeasured,
  readMeasured,
  readPasted,
  saysNothing,
  setBeside,
  settle,
  shieldingLike,
  withMeasured,
  writeMeasured,
} from "./measured.ts";
import { againstMeasured, fitLine, fitShieldings, shiftOf } from "./shielding-fit.ts";

const SHIELDINGS = [180, 150, 110, 60];
const SHIFTS = [8, 38, 76, 126];
/** scipy 1.17.1: linregress(SHIFTS, SHIELDINGS). */
const SCIPY = { slope: -1.0200411099691675, intercept: 188.24254881808838 };

describe("shieldings against known shifts", () => {
  it("scale as worked by hand (scipy 1.17.1 linregress gives the same line to 1e-12)", () => {
    const line = fitShieldings(SHIELDINGS, SHIFTS)!;
    expect(line.slope).toBeCloseTo(-1.0200411, 7);
    expect(line.intercept).toBeCloseTo(188.2425488, 7);
    expect(line.slope).toBeCloseTo(SCIPY.slope, 12);
    expect(line.intercept).toBeCloseTo(SCIPY.intercept, 11);
    const scaled = SHIELDINGS.map((sigma) => shiftOf(sigma, line));
    expect(scaled.map((value) => Number(value.toFixed(4)))).toEqual([8.0806, 37.4912, 76.7053, 125.7229]);
    expect(againstMeasured(scaled, SHIFTS)!.mad).toBeCloseTo(0.392947, 6);
  });

  it("take the shielding of a reference where the slope is -1", () => {
    expect(shiftOf(60, { slope: -1, intercept: 188.1 })).toBeCloseTo(128.1, 12);
    expect(() => shiftOf(60, { slope: 0, intercept: 1 })).toThrow(RangeError);
  });

  it("need three pairs and shifts that differ", () => {
    expect(fitShieldings([180, 150], [8, 38])).toBeNull();
    expect(fitLine([1, 1, 1], [1, 2, 3])).toBeNull();
  });
});

describe("computed against measured", () => {
  it("is told by mean, root mean square and largest deviation, and corrected from five pairs on", () => {
    const found = againstMeasured([1.5, 2.5, 2.5, 4.5], [1, 2, 3, 4])!;
    expect(found).toMatchObject({ n: 4, mad: 0.5, msd: 0.25, rmsd: 0.5, max: 0.5, corrected: null });
    // d = 1.1 e + 2 exactly: nothing is left once the line is taken out.
    const measured = [0, 10, 20, 30, 40];
    const exact = againstMeasured(
      measured.map((e) => 1.1 * e + 2),
      measured,
    )!;
    expect(exact.corrected!.line.slope).toBeCloseTo(1.1, 12);
    expect(exact.corrected!.line.intercept).toBeCloseTo(2, 12);
    expect(exact.corrected!.mad).toBeCloseTo(0, 12);
    expect(exact.maxPlace).toBe(4);
    expect(againstMeasured([], [])).toBeNull();
  });

  it("is never worse after correction by least squares than before, as root mean square over the line", () => {
    const pair = fc.tuple(fc.double({ min: -50, max: 50, noNaN: true }), fc.integer({ min: -50, max: 50 }));
    fc.assert(
      fc.property(fc.array(pair, { minLength: 5, maxLength: 20 }), (pairs) => {
        const computed = pairs.map(([value]) => value);
        const measured = pairs.map(([, value]) => value);
        const line = fitLine(measured, computed);
        if (line === null) return;
        const square = (of: (i: number) => number) => pairs.reduce((sum, _, i) => sum + of(i) ** 2, 0);
        const about = square((i) => computed[i]! - line.intercept - line.slope * measured[i]!);
        const plain = square((i) => computed[i]! - measured[i]!);
        expect(about).toBeLessThanOrEqual(plain + 1e-6);
      }),
      { seed: 11, numRuns: 200 },
    );
  });
});

describe("averages beside measured values", () => {
  const carbon = SHIELDINGS.map((average, k) => ({
    ...{ atom: k + 1, z: 6, average, error: 1, measured: SHIFTS[k]! },
  }));
  const hydrogen = { atom: 9, z: 1, average: 28, error: null, measured: 3.4 };

  it("are taken nucleus by nucleus, shieldings scaled by the line fitted to them", () => {
    const [h, c] = setBeside([...carbon, hydrogen], { shieldings: true, scaling: new Map() });
    expect(h).toMatchObject({ z: 1, line: null, agreement: null });
    expect(h!.groups[0]!.computed).toBeNull();
    expect(c!.line).toMatchObject({ from: "fitted", n: 4 });
    expect(c!.agreement!.mad).toBeCloseTo(0.392947, 6);
    expect(c!.groups[0]!.computedError).toBeCloseTo(1 / 1.0200411, 7);
    expect(c!.farthest).toBe(3);
  });

  it("take a line that is typed in, and shifts as they are", () => {
    const scaling = new Map([[1, { slope: -1, intercept: 31.5 }]]);
    const [h] = setBeside([hydrogen], { shieldings: true, scaling });
    expect(h!.groups[0]).toMatchObject({ computed: 3.5 });
    expect(h!.groups[0]!.difference).toBeCloseTo(0.1, 12);
    const [plain] = setBeside([{ ...hydrogen, average: 3.5 }], { shieldings: false, scaling });
    expect(plain!.line).toBeNull();
    expect(plain!.agreement).toMatchObject({ n: 1 });
  });
});

describe("measured values in an address", () => {
  it("come back as they were written", () => {
    const state: MeasuredState = {
      quantity: "shielding ~ 100 %",
      are: "shieldings",
      values: new Map([
        [1, 77.3],
        [12, -0.4],
      ]),
      scaling: new Map([[6, { slope: -1.05, intercept: 186.2 }]]),
      swapped: new Set([12]),
    };
    expect(readMeasured(writeMeasured(state))).toEqual(state);
    expect(writeMeasured(nothingMeasured("x"))).toBe("x");
    expect(readMeasured("x")).toEqual(nothingMeasured("x"));
    expect(measuredState(measuredRecord(state))).toEqual(state);
    expect(saysNothing(measuredRecord(state))).toBe(false);
    expect(saysNothing(measuredRecord(nothingMeasured("x")))).toBe(true);
  });

  it("are left out where they are none", () => {
    const read = readMeasured("shift~1:x~z6:0:3~z6:1~a:2~4:5");
    expect([...read.values]).toEqual([[4, 5]]);
    expect(read.scaling.size).toBe(0);
  });

  it("stand beside those of other quantities and everything else", () => {
    const params = new URLSearchParams("T=310&meas=charge~2:0.5&meas=shift~1:77.3");
    const draft = measuredIn(params, "shift")!;
    expect([...draft.values]).toEqual([[1, 77.3]]);
    expect(measuredIn(params, "coupling")).toBeNull();
    const kept = nothingMeasured("shift");
    expect([...withMeasured(params, { ...draft, values: new Map([[1, 70]]) }, kept)]).toEqual([
      ["T", "310"],
      ["meas", "charge~2:0.5"],
      ["meas", "shift~1:70"],
    ]);
    expect(withMeasured(params, kept, kept).getAll("meas")).toEqual(["charge~2:0.5"]);
  });

  it("stay as a draft that takes away what is kept, and go where they say what is kept", () => {
    const kept = { ...nothingMeasured("shift"), values: new Map([[1, 77.3]]) };
    const emptied = withMeasured(new URLSearchParams(), nothingMeasured("shift"), kept);
    expect(emptied.getAll("meas")).toEqual(["shift"]);
    expect(measuredIn(emptied, "shift")!.values.size).toBe(0);
    expect(withMeasured(emptied, kept, kept).has("meas")).toBe(false);
  });

  it("stand beside shieldings or shifts as somebody said, else as the name says", () => {
    expect(areShieldings({ quantity: "13C shielding", are: null }, "ppm")).toBe(true);
    expect(areShieldings({ quantity: "13C shielding", are: "shifts" }, "ppm")).toBe(false);
    expect(areShieldings({ quantity: "shift", are: null }, "ppm")).toBe(false);
    expect(areShieldings({ quantity: "J", are: "shieldings" }, "Hz")).toBe(false);
  });

  it("are read off pasted lines, whatever separates them", () => {
    const groups = new Map([
      [1, 1],
      [4, 4],
      [5, 4],
    ]);
    const pasted = "C1 77.3\nH5\t1.21\n\nC9 3\nhello";
    expect(readPasted(pasted, groups)).toEqual({
      values: new Map([
        [1, 77.3],
        [4, 1.21],
      ]),
      unread: [
        { line: "C9 3", why: "name" },
        { line: "hello", why: "number" },
      ],
    });
    expect(readPasted("H4, H5: 1.2\n1 = \u22120.5", groups).values).toEqual(
      new Map([
        [4, 1.2],
        [1, -0.5],
      ]),
    );
    expect(readPasted("C1 77,3", groups)).toEqual({
      values: new Map(),
      unread: [{ line: "C1 77,3", why: "comma" }],
    });
    expect(readPasted("C1 77,3", groups, true).values).toEqual(new Map([[1, 77.3]]));
  });
});

describe("a measured value keeps the atoms that it was measured for", () => {
  const whole = [[4], [10, 15]];
  const apart = [[4], [10], [15]];
  const entered: MeasuredState = {
    ...nothingMeasured("shift"),
    values: new Map([
      [4, 20],
      [10, 80.08],
    ]),
  };
  const kept = settle(entered, whole);

  it("is set aside when the group is taken apart, in words, and not compared", () => {
    expect(kept.of).toEqual(
      new Map([
        [4, [4]],
        [10, [10, 15]],
      ]),
    );
    const split = settle(kept, apart);
    expect([...split.values]).toEqual([[4, 20]]);
    expect(split.aside).toEqual([{ atoms: [10, 15], value: 80.08 }]);
    expect(asideWords(split.aside!, (atom) => `C${atom}`, "ppm")).toContain(
      "was measured for C10 and C15 together: not compared.",
    );
  });

  it("comes back when the group is put together, and the parts' own values go aside", () => {
    const split = settle(kept, apart);
    const both = settle({ ...split, values: new Map([...split.values, [10, 79.5], [15, 80.6]]) }, apart);
    expect([...both.values.keys()].sort((x, y) => x - y)).toEqual([4, 10, 15]);
    const joined = settle(both, whole);
    expect(joined.values.get(10)).toBe(80.08);
    expect(joined.aside).toEqual([
      { atoms: [10], value: 79.5 },
      { atoms: [15], value: 80.6 },
    ]);
    expect(asideWords(joined.aside!, (atom) => `C${atom}`, "ppm")).toContain("for C10 alone");
    expect(writeMeasured(settle(joined, apart))).toBe(writeMeasured(both));
  });

  it("comes back from the address and from what is kept, for either grouping", () => {
    for (const state of [kept, settle(kept, apart)]) {
      expect(settle(readMeasured(writeMeasured(state)), whole)).toEqual(kept);
      expect(settle(measuredState(measuredRecord(state)), whole)).toEqual(kept);
    }
    expect(writeMeasured(kept)).toBe("shift~a4:20~a10.15:80.08");
    expect(saysNothing(measuredRecord(settle(readMeasured("shift~a10.15:80.08"), apart)))).toBe(false);
  });

  it("of before stands for the signal that begins with its atom", () => {
    expect(settle(readMeasured("shift~10:80.08"), whole).of?.get(10)).toEqual([10, 15]);
    expect(measuredRecord(readMeasured("shift~10:80.08"))).not.toHaveProperty("of");
  });
});

describe("numbers taken for shifts that fall as the measured ones rise", () => {
  const nuclei = (averages: readonly number[]) =>
    setBeside(
      averages.map((average, k) => ({ atom: k + 1, z: 6, average, error: null, measured: SHIFTS[k]! })),
      { shieldings: false, scaling: new Map() },
    );
  it("look like shieldings, with the slope of the fit", () => {
    const [like] = shieldingLike(nuclei(SHIELDINGS));
    expect(like!.z).toBe(6);
    expect(like!.slope).toBeCloseTo(SCIPY.slope, 12);
    expect(shieldingLike(nuclei([8, 37, 77, 127]))).toEqual([]);
    expect(shieldingLike(nuclei(SHIELDINGS.slice(0, 2)))).toEqual([]);
  });
});

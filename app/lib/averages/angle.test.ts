import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { turnOf, wrapTurn } from "./angle.ts";
import { averageOf, momentsOf, type SetFacts } from "./average.ts";
import { contributionsOf } from "./contributions.ts";
import { initialRule, possibleRules, ruleAgainstUnit } from "./rule.ts";
import { steadyWords } from "./steady.ts";
import { averageErrors } from "./uncertainty.ts";
import { valueHistogram } from "./value-histogram.ts";
import { digitsFor } from "./words.ts";

const single = (n: number): SetFacts => ({ degeneracies: new Array(n).fill(1), mirrorMerged: false });
const angle = (unit: string | null, values: number[], facts = single(values.length)) =>
  momentsOf({ rule: "circular", unit, values }, facts);

describe("an angle in radians", () => {
  it("goes round at 2 pi: 3.1 and -3.1 meet at pi", () => {
    const { value, spread } = averageOf(angle("rad", [3.1, -3.1]), [0.5, 0.5]);
    // z = cos 3.1, by hand: arg z = pi, R = |cos 3.1|, sd = sqrt(-2 ln R).
    expect(value).toBeCloseTo(Math.PI, 12);
    expect(spread).toBeCloseTo(Math.sqrt(-2 * Math.log(Math.abs(Math.cos(3.1)))), 12);
    expect(averageOf(angle("mrad", [3100, -3100]), [0.5, 0.5]).value).toBeCloseTo(1000 * Math.PI, 9);
  });

  it("gives what its degrees give, in every figure that is made of it", () => {
    const list = fc.array(fc.double({ min: -180, max: 180, noNaN: true }), { minLength: 2, maxLength: 6 });
    fc.assert(
      fc.property(list, fc.boolean(), (degrees, paired) => {
        const facts = { degeneracies: degrees.map(() => (paired ? 2 : 1)), mirrorMerged: paired };
        const radians = degrees.map((value) => (value * Math.PI) / 180);
        const [inDegrees, inRadians] = [angle("°", degrees, facts), angle("rad", radians, facts)];
        const p = degrees.map((_, k) => (2 * (k + 1)) / (degrees.length * (degrees.length + 1)));
        const [a, b] = [averageOf(inDegrees, p), averageOf(inRadians, p)];
        const same = (x: number | null, y: number | null, unit = 180 / Math.PI) => {
          if (x === null || y === null) expect([x, y]).toEqual([null, null]);
          else expect(Math.abs(wrapTurn(x - y * unit, 360))).toBeLessThan(1e-5);
        };
        expect(b.resultant).toBeCloseTo(a.resultant ?? Number.NaN, 10);
        // A resultant at the bound itself may fall on either side.
        if (Math.abs((a.resultant ?? 0) - 0.1) < 1e-9 || (a.resultant ?? 0) > 1 - 1e-9) return;
        same(a.value, b.value);
        same(a.spread, b.spread);
        contributionsOf(inDegrees, p, 298.15).forEach((one, k) => {
          const other = contributionsOf(inRadians, p, 298.15)[k]!;
          if (one.without !== null && other.without !== null) same(one.without, other.without);
        });
      }),
      { seed: 20261, numRuns: 200 },
    );
  });

  it("has bins of 15° from -pi to pi, a range that wraps, and three decimals", () => {
    const bins = valueHistogram(angle("rad", [3.1, 3.2, 0]), [0.25, 0.25, 0.5])!.bins;
    expect(bins).toHaveLength(24);
    expect(bins.map(({ share }) => share).filter((share) => share > 0)).toEqual([0.25, 0.5, 0.25]);
    expect(bins.at(-1)?.to).toBeCloseTo(Math.PI, 12);
    expect(steadyWords(angle("rad", [3.1, -3.1]), "rad", 3)).toContain("does not vary");
    expect(steadyWords(angle("rad", [1, 2]), "rad", 3)).toBeNull();
    expect(digitsFor("rad", 2.5)).toBe(3);
  });

  it("has no spread where all directions agree", () => {
    expect(averageOf(angle("°", [60, 60, 60]), [0.1, 0.2, 0.7]).spread).toBe(0);
    expect(averageOf(angle("rad", [1, 1]), [0.3, 0.7]).spread).toBe(0);
    const close = averageOf(angle("°", [60, 60.00002]), [0.5, 0.5]).spread;
    expect(close).toBeCloseTo(0.00001, 9);
  });

  it("can be circular, and only degrees begin so", () => {
    expect(possibleRules({ name: "phi", unit: "rad" })).toEqual(["circular", "linear"]);
    expect([initialRule("rad"), initialRule("°"), initialRule("deg"), initialRule(null)]).toEqual([
      "linear",
      "circular",
      "circular",
      "linear",
    ]);
    expect(ruleAgainstUnit("circular", "Å")).toContain("rad");
    expect(ruleAgainstUnit("circular", "furlong")).toContain("rad");
    expect(ruleAgainstUnit("circular", null)).toBeNull();
    expect(ruleAgainstUnit("r-6", "nm")).toBeNull();
    expect([turnOf("degrees"), turnOf("radian"), turnOf("mrad"), turnOf("ppm")]).toEqual([
      360,
      2 * Math.PI,
      2000 * Math.PI,
      null,
    ]);
  });
});

describe("the uncertainty of an angle", () => {
  const draws = (sigma: number, values: number[], unit = "°") =>
    averageErrors([angle(unit, values)], {
      energies: values.map((_, k) => 0.3 * k),
      weights: values.map(() => 1),
      temperatureK: 298.15,
      error: { sigma },
      seed: 20261,
      draws: 2000,
    })[0]!.sd;

  it("is exactly 0 without an error of the energies", () => {
    expect(draws(0, [60, 62, 170])).toBe(0);
    expect(draws(0, [1, 1.1, 3], "rad")).toBe(0);
  });

  it("is that of its degrees, in radians", () => {
    const degrees = draws(0.5, [60, 75, 170]);
    expect(degrees).toBeGreaterThan(1);
    expect(
      draws(
        0.5,
        [60, 75, 170].map((value) => (value * Math.PI) / 180),
        "rad",
      ),
    ).toBeCloseTo((degrees * Math.PI) / 180, 10);
  });
});

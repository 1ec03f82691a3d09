import { describe, expect, it } from "vitest";
import { mean, sampleSd } from "./moments.ts";
import { fromWords, generator } from "./random.ts";

describe("xoshiro128**", () => {
  it("gives the words of the published C program (stored as test data in the public repository edorfaus/xoshiro-6502)", () => {
    const { bits } = fromWords(0x964d4a0c, 0xd40ab895, 0xad7fdecb, 0x3006f0f0);
    expect([bits(), bits(), bits(), bits()]).toEqual([0xf1391922, 0x6fe53806, 0xa5be2840, 0xf510ee70]);
  });

  it("gives the same numbers from the same seed and others from another", () => {
    const take = (seed: number) =>
      Array.from(
        { length: 5 },
        (
          (g) => () =>
            g.uniform()
        )(generator(seed)),
      );
    expect(take(412)).toEqual(take(412));
    expect(take(412)).not.toEqual(take(413));
  });
});

describe("distributions, 100,000 numbers, within four standard errors", () => {
  const n = 100_000;

  it("uniform: mean 1/2, sd 1/sqrt(12)", () => {
    const g = generator(1);
    const values = Float64Array.from({ length: n }, () => g.uniform());
    expect(Math.abs(mean(values) - 0.5)).toBeLessThan(4 / Math.sqrt(12 * n));
    expect(values.every((v) => v >= 0 && v < 1)).toBe(true);
  });

  it("normal: mean 0, sd 1, 2.275 % above 2", () => {
    const g = generator(2);
    const values = Float64Array.from({ length: n }, () => g.normal());
    expect(Math.abs(mean(values))).toBeLessThan(4 / Math.sqrt(n));
    expect(Math.abs((sampleSd(values) ?? 0) - 1)).toBeLessThan(4 / Math.sqrt(2 * n));
    const above = values.filter((v) => v > 2).length / n;
    expect(Math.abs(above - 0.02275)).toBeLessThan(4 * Math.sqrt(0.02275 / n));
  });

  it("below: every number as often as the others", () => {
    const g = generator(3);
    const counts = new Int32Array(6);
    for (let k = 0; k < n; k++) {
      const at = g.below(6);
      counts[at] = counts[at]! + 1;
    }
    for (const count of counts) expect(Math.abs(count - n / 6)).toBeLessThan(4 * Math.sqrt(n / 6));
  });
});

it("refuses what is no seed", () => {
  for (const seed of [-1, 0.5, 2 ** 32, Number.NaN]) expect(() => generator(seed)).toThrow(/seed/);
});

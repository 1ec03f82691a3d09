import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { mean, meanAbsolute, rootMeanSquare, sampleSd, sum } from "./moments.ts";
import { median, quantile } from "./quantile.ts";
import { midRanks, placeRanks } from "./ranks.ts";

describe("by hand", () => {
  it("sums without losing the small ones", () => {
    expect(sum([1, 1e100, 1, -1e100])).toBe(2);
    expect(sum([])).toBe(0);
  });

  it("means and spreads", () => {
    expect(mean([1, 2, 6])).toBe(3);
    expect(meanAbsolute([-1, 3])).toBe(2);
    expect(rootMeanSquare([3, -4])).toBeCloseTo(Math.sqrt(12.5), 14);
    expect(sampleSd([1, 2, 3])).toBe(1);
    expect(sampleSd([5])).toBeNull();
  });

  it("quantiles as numpy 2.4 gives them by default", () => {
    // np.quantile([3, 1, 4, 1, 5], [0.025, 0.1, 0.5, 0.975])
    expect([0.025, 0.1, 0.5, 0.975].map((p) => quantile([3, 1, 4, 1, 5], p))).toEqual([1, 1, 3, 4.9]);
    expect(median([4, 1, 3, 2])).toBe(2.5);
    expect(() => quantile([], 0.5)).toThrow(RangeError);
    expect(() => quantile([1], 2)).toThrow(RangeError);
  });

  it("ranks with ties, shared and as places", () => {
    expect(Array.from(midRanks([12, 2, 1, 12, 2]))).toEqual([4.5, 2.5, 1, 4.5, 2.5]);
    expect(Array.from(placeRanks([0.5, 0, 0.5, 2]))).toEqual([2, 1, 2, 4]);
  });
});

it("ranks add up to n(n + 1)/2, ties or not", () => {
  fc.assert(
    fc.property(fc.array(fc.integer({ min: 0, max: 9 }), { maxLength: 50 }), (list) => {
      expect(sum(midRanks(list))).toBe((list.length * (list.length + 1)) / 2);
    }),
    { seed: 20261201 },
  );
});

import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { quantileOfSorted, quantilesInPlace } from "./quantile.ts";

describe("quantiles of an unsorted list", () => {
  const shares = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 1, maxLength: 5 });
  // Few different values make ties; any double makes infinities and what is no number.
  const value = fc.oneof(
    fc.constantFrom(0, 0.25, 0.5, 1),
    fc.double().map((x) => (x === 0 ? 0 : x)),
  );

  it("are those of the sorted one, to the last bit", () => {
    fc.assert(
      fc.property(fc.array(value, { minLength: 1, maxLength: 200 }), shares, (list, some) => {
        const rising = some.slice().sort((a, b) => a - b);
        const sorted = Float64Array.from(list).sort();
        const found = quantilesInPlace(Float64Array.from(list), rising);
        expect(found).toEqual(rising.map((share) => quantileOfSorted(sorted, share)));
      }),
      { seed: 20261202, numRuns: 300 },
    );
  });

  it("refuse an empty list and a share that is none", () => {
    expect(() => quantilesInPlace(new Float64Array(0), [0.5])).toThrow(RangeError);
    expect(() => quantilesInPlace(Float64Array.of(1), [1.5])).toThrow(RangeError);
  });
});

import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { rarefied, samplingCoverage, twoSearches } from "./sampling-coverage.ts";

// Values without another source were worked out from the published formulas in double precision.
const HITS = [5, 4, 3, 2, 2, 1, 1, 1, 1];
/** Counts of spiders in hemlock woods: public example data of a package for species richness, as are its printed figures. */
const SPIDERS = [46, 22, 17, 15, 15, 9, 8, 6, 6, 4, 2, 2, 2, 2, ...new Array(12).fill(1)];

describe("coverage and richness", () => {
  it("of nine conformers found 20 times", () => {
    const found = samplingCoverage(HITS)!;
    expect(found).toMatchObject({ hits: 20, distinct: 9, once: 4, twice: 2 });
    expect(found.coverage).toBeCloseTo(0.8, 12);
    expect(found.refined).toBeCloseTo(0.81, 12);
    expect(found.richness.estimate).toBeCloseTo(12.8, 12);
    expect(found.richness.biasCorrected).toBeCloseTo(11, 12);
    expect(found.richness.variance).toBeCloseTo(25.46, 9);
    expect(found.richness.low).toBeCloseTo(9.527, 3);
    expect(found.richness.high).toBeCloseTo(36.412, 3);
  });

  it("of the published counts, with their published standard error and interval", () => {
    const found = samplingCoverage(SPIDERS)!;
    expect(found).toMatchObject({ hits: 168, distinct: 26 });
    expect(found.coverage).toBeCloseTo(0.928571, 6);
    expect(found.refined).toBeCloseTo(0.928855, 6);
    expect(found.richness.estimate).toBeCloseTo(43.892857, 6);
    expect(Math.sqrt(found.richness.variance!)).toBeCloseTo(14.3056, 4);
    expect(found.richness.low).toBeCloseTo(30.511, 3);
    // The package takes 1.959964 where the published formula has 1.96.
    expect(Math.abs(found.richness.high! - 96.971)).toBeLessThan(0.003);
    expect(rarefied(SPIDERS, 84)).toBeCloseTo(18.91236, 5);
    expect(rarefied(SPIDERS, 336)).toBeCloseTo(34.730733, 6);
  });

  it.each([
    [[1, 1, 1, 1], 0, 0.181818, 8.5, 10],
    [[6, 3, 1, 1, 1], 0.75, 0.770833, 7.75, 8],
  ])("of %j, none found twice: no interval", (hits, coverage, refined, estimate, corrected) => {
    const found = samplingCoverage(hits)!;
    expect(found.coverage).toBeCloseTo(coverage, 12);
    expect(found.refined).toBeCloseTo(refined, 6);
    expect(found.richness.estimate).toBeCloseTo(estimate, 12);
    expect(found.richness.biasCorrected).toBeCloseTo(corrected, 12);
    expect(found.richness).toMatchObject({ variance: null, low: null, high: null });
  });

  it("of 4 3 2 2, none found once: everything is there", () => {
    const found = samplingCoverage([4, 3, 2, 2])!;
    expect(found).toMatchObject({ coverage: 1, refined: 1 });
    expect(found.richness).toMatchObject({ estimate: 4, low: 4, high: 4 });
  });

  it("says nothing of nothing, and refuses a conformer found less than once", () => {
    expect(samplingCoverage([])).toBeNull();
    expect(() => samplingCoverage([1, 0])).toThrow(RangeError);
  });
});

describe("rarefaction", () => {
  it.each([
    [5, 4.020188],
    [10, 6.361455],
    [15, 7.884868],
    [20, 9],
    [30, 10.5248],
    [40, 11.437753],
  ])("to %i hits: %f conformers", (hits, distinct) => {
    expect(rarefied(HITS, hits)).toBeCloseTo(distinct, 6);
  });

  it("is what drawing without replacement gives, rises, and never passes what was found", () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 1, max: 9 }), { minLength: 1, maxLength: 8 }), (hits) => {
        const n = hits.reduce((total, count) => total + count, 0);
        // One hit finds one conformer; leaving out one hit of n loses a conformer with the chance f1/n.
        expect(rarefied(hits, 1)).toBeCloseTo(1, 9);
        const once = hits.filter((count) => count === 1).length;
        expect(rarefied(hits, n - 1)).toBeCloseTo(hits.length - once / n, 9);
        for (let m = 1; m <= n; m++) {
          expect(rarefied(hits, m)).toBeGreaterThanOrEqual(rarefied(hits, m - 1) - 1e-9);
          expect(rarefied(hits, m)).toBeLessThanOrEqual(hits.length + 1e-9);
        }
      }),
      { seed: 54, numRuns: 200 },
    );
  });

  it("refuses more than twice the hits", () => {
    expect(() => rarefied(HITS, 41)).toThrow(RangeError);
  });
});

describe("two searches", () => {
  it("30 and 28 conformers, 21 in common: 39.86 exist", () => {
    expect(twoSearches(30, 28, 21).estimate).toBeCloseTo(39.863636, 6);
  });
  it("the same conformers twice: no more exist", () => {
    expect(twoSearches(12, 12, 12).estimate).toBe(12);
    expect(() => twoSearches(3, 4, 5)).toThrow(RangeError);
  });
});

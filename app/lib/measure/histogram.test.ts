import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { measureHistogram } from "./histogram.ts";

const filled = (h: ReturnType<typeof measureHistogram>) => h.bins.filter((bin) => bin.share > 0);

describe("measureHistogram of torsions", () => {
  it("has 24 bins of 15° about the multiples of 15°, from -180 on", () => {
    const { bins } = measureHistogram("torsion", [0], [1], [1]);
    expect(bins).toHaveLength(24);
    expect([bins[0]?.from, bins[0]?.to, bins[23]?.from, bins[23]?.to]).toEqual([
      -187.5, -172.5, 157.5, 172.5,
    ]);
  });

  it("keeps the peaks of a butane whole: gauche, trans, gauche", () => {
    const found = filled(
      measureHistogram("torsion", [178, -179, 65, -65], [0.4, 0.3, 0.15, 0.15], [1, 1, 1, 1]),
    );
    expect(found.map((bin) => [bin.from, bin.to])).toEqual([
      [-67.5, -52.5],
      [52.5, 67.5],
      [172.5, 187.5],
    ]);
    expect(found.map((bin) => bin.share)).toEqual([0.15, 0.15, 0.7]);
  });

  it("cuts the circle where the least lies, when nothing is free", () => {
    const everywhere = Array.from({ length: 24 }, (_, k) => -180 + 15 * k);
    const shares = everywhere.map((degrees) => (degrees === 30 || degrees === 45 ? 0.01 : 0.98 / 22));
    const { bins } = measureHistogram("torsion", everywhere, shares, Array(24).fill(1));
    expect(bins[0]?.from).toBe(37.5 - 360);
    expect(bins[23]?.to).toBe(37.5);
  });

  it("counts a mirror pair half at t and half at -t", () => {
    const found = filled(measureHistogram("torsion", [-154, 158], [0.6, 0.4], [2, 1]));
    expect(found.map((bin) => [bin.from, bin.share])).toEqual([
      [-157.5, 0.3],
      [142.5, 0.3],
      [157.5, 0.4],
    ]);
    expect(found[1]?.parts).toEqual([{ index: 0, share: 0.3 }]);
  });

  it("keeps both halves of a pair at 180 in one bin, as one part", () => {
    const found = filled(measureHistogram("torsion", [180], [1], [2]));
    expect(found).toEqual([{ from: 172.5, to: 187.5, share: 1, parts: [{ index: 0, share: 1 }] }]);
  });

  it("puts t and -t into bins that mirror each other, bounds included", () => {
    for (const degrees of [7.6, 52.5, 60, 67.5, 127.4, 172.5]) {
      const [low, high] = filled(measureHistogram("torsion", [degrees], [1], [2]));
      expect(low).not.toBe(undefined);
      // On the circle: 157.5 to 172.5 mirrors 187.5 to 202.5.
      expect(((low?.from ?? 1) + (high?.to ?? 0)) % 360).toBeCloseTo(0, 9);
    }
    const [last] = filled(measureHistogram("torsion", [-180], [1], [1]));
    expect(last?.to).toBe(187.5);
  });

  it("stacks from the most populated down", () => {
    const { parts } = filled(measureHistogram("torsion", [61, 62, 63], [0.2, 0.5, 0.3], [1, 1, 1]))[0] ?? {};
    expect(parts?.map((part) => part.index)).toEqual([1, 2, 0]);
  });

  it("puts undefined values in no bin and says their share", () => {
    const h = measureHistogram("torsion", [null, 60], [0.25, 0.75], [2, 1]);
    expect(h.undefinedShare).toBe(0.25);
    expect(filled(h).map((bin) => bin.share)).toEqual([0.75]);
    expect(measureHistogram("torsion", [null], [1], [1]).bins).toEqual([]);
  });

  it("loses no population, is even for pairs", () => {
    const conformer = fc.tuple(
      fc.option(fc.double({ min: -180, max: 180, noNaN: true })),
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.constantFrom(1, 2),
    );
    fc.assert(
      fc.property(fc.array(conformer), (list) => {
        const h = measureHistogram(
          "torsion",
          list.map((c) => c[0]),
          list.map((c) => c[1]),
          list.map((c) => c[2]),
        );
        const sum = h.bins.reduce((total, bin) => total + bin.share, h.undefinedShare);
        expect(sum).toBeCloseTo(
          list.reduce((total, c) => total + c[1], 0),
          9,
        );
        for (const bin of h.bins) {
          expect(bin.parts.reduce((total, part) => total + part.share, 0)).toBeCloseTo(bin.share, 9);
        }
      }),
      { seed: 20261201 },
    );
  });
});

describe("measureHistogram of distances and angles", () => {
  it("does not split a mirror pair: both images have the same distance", () => {
    const found = filled(measureHistogram("distance", [4.77, 5.82], [0.4, 0.6], [2, 2]));
    expect(found.map((bin) => bin.share)).toEqual([0.4, 0.6]);
  });

  it("begins and ends at round values that hold every value", () => {
    const { bins } = measureHistogram("distance", [3.94, 6.61], [0.5, 0.5], [1, 1]);
    expect(bins[0]?.from).toBe(3.8);
    expect(bins.at(-1)?.to).toBe(6.8);
    expect(bins[0]?.share).toBe(0.5);
    expect(bins.at(-1)?.share).toBe(0.5);
  });

  it("gives equal values one bin", () => {
    expect(measureHistogram("angle", [109.5, 109.5], [0.5, 0.5], [1, 1]).bins).toEqual([
      {
        from: 109.5,
        to: 110,
        share: 1,
        parts: [
          { index: 0, share: 0.5 },
          { index: 1, share: 0.5 },
        ],
      },
    ]);
  });

  it("refuses lists of different length", () => {
    expect(() => measureHistogram("distance", [1], [1, 2], [1])).toThrow(RangeError);
  });
});

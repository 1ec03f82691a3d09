import { describe, expect, it } from "vitest";
import type { SiftResult } from "../recipe/result.ts";
import { farthestRepeats, nearestOthers, nearnessHistogram } from "./nearness.ts";

const dropped = (frame: number, rmsd: number) => ({ frame, repeats: 1, rmsd, energyDifference: 0.01 });
const result = {
  kept: [],
  dropped: [dropped(2, 0.01), dropped(3, 0.004), dropped(5, 0.052), dropped(4, 0.052)],
} as unknown as SiftResult;

describe("how near frames lie to each other", () => {
  it("counts merged frames and kept conformers apart, everything once", () => {
    const { bins, closed } = nearnessHistogram(result, [0.41, 0.42, 0.9], 0.2);
    expect(bins.reduce((sum, bin) => sum + bin.merged, 0)).toBe(4);
    expect(bins.reduce((sum, bin) => sum + bin.apart, 0)).toBe(3);
    expect(closed).toBe(true);
    for (const bin of bins) {
      if (bin.to <= 0.2) expect(bin.apart).toBe(0);
      if (bin.from >= 0.2) expect(bin.merged).toBe(0);
    }
  });

  it("names both sides of the gap", () => {
    expect(nearnessHistogram(result, [0.41, 0.42], 0.2)).toMatchObject({
      farthestMerged: 0.052,
      nearestApart: 0.41,
    });
  });

  it("takes what lies far out into the last bin, and has room for the tolerance", () => {
    const { bins, closed } = nearnessHistogram(result, [0.5, 7], 0.2);
    expect(closed).toBe(false);
    expect(bins.at(-1)?.apart).toBe(1);
    expect(bins.at(-1)?.to).toBeCloseTo(2, 6);
    const narrow = nearnessHistogram({ ...result, dropped: [] }, [Number.POSITIVE_INFINITY], 0.3);
    expect(narrow.bins.at(-1)?.to).toBeGreaterThanOrEqual(0.3);
    expect(narrow).toMatchObject({ farthestMerged: null, nearestApart: null });
  });
});

describe("lists", () => {
  it("of the nearest others leaves out the conformer itself and keeps the order of the set among equals", () => {
    expect(nearestOthers([0, 0.5, 0.3, 0.5], 0, 2).map(({ index }) => index)).toEqual([2, 1]);
  });

  it("of the farthest repeats begins with the farthest", () => {
    expect(farthestRepeats(result, 3).map(({ frame }) => frame)).toEqual([4, 5, 2]);
  });
});

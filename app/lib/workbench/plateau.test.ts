import { describe, expect, it } from "vitest";
import { countedTolerances, plateauAround, plateauSentence } from "./plateau.ts";

const counts = {
  rmsdTolerances: [0.02, 0.1, 0.2, 0.4, 0.6],
  energyFactors: [0.5, 1, 2],
  counts: [
    [60, 33, 33, 33, 30],
    [55, 31, 31, 31, 24],
    [55, 31, 30, 28, 20],
  ],
  exact: true,
};

describe("the count against the tolerance", () => {
  it("takes the line of the recipe's energy tolerance, with the tolerance at hand among it", () => {
    const points = countedTolerances(counts, { tolerance: 0.25, count: 31 });
    expect(points.map(({ tolerance }) => tolerance)).toEqual([0.02, 0.1, 0.2, 0.25, 0.4, 0.6]);
    expect(points.map(({ count }) => count)).toEqual([55, 31, 31, 31, 31, 24]);
    expect(countedTolerances(counts, { tolerance: 0.1, count: 31 })).toHaveLength(5);
    expect(countedTolerances(counts, null)).toHaveLength(5);
  });

  it("finds the plateau around a tolerance, and none where the count stands alone", () => {
    const points = countedTolerances(counts, { tolerance: 0.25, count: 31 });
    expect(plateauAround(points, 0.25)).toEqual({ from: 0.1, to: 0.4, count: 31 });
    expect(plateauAround(points, 0.6)).toBeNull();
    expect(plateauAround(points, 0.3)).toBeNull();
  });

  it("says in words whether the count hangs on the choice", () => {
    const points = countedTolerances(counts, { tolerance: 0.25, count: 31 });
    expect(plateauSentence(points, 0.25)).toContain(
      "stays at 31 at every tolerance counted from 0.10 to 0.40",
    );
    expect(plateauSentence(points, 0.6)).toContain("31 at 0.40");
    expect(plateauSentence(points, 0.3)).toBeNull();
  });
});

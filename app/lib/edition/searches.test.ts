import { describe, expect, it } from "vitest";
import type { KeptConformer } from "../recipe/result.ts";
import { searchesOf, searchesSection, searchSentence } from "./searches.ts";

const conformer = (frame: number, found: number): KeptConformer => ({
  ...{ frame, found, relativeEnergy: null, degeneracy: 1, symmetryNumber: 1, copies: 1, mirrorRmsd: 0 },
});
const repeat = (frame: number, repeats: number) => ({ frame, repeats, rmsd: 0, energyDifference: null });

// Three shapes: the first search (frames 1 to 4) meets the first twice and the second and third once, the other (5 and 6)
// the first and the third.
const result = {
  kept: [conformer(1, 3), conformer(2, 1), conformer(4, 2)],
  dropped: [repeat(3, 1), repeat(5, 1), repeat(6, 4)],
};
const searches: { name: string; ranges: [number, number][] }[] = [
  { name: "night", ranges: [[1, 4]] },
  { name: "day", ranges: [[5, 6]] },
];

describe("searches of an edition", () => {
  it("say what each found, and by capture and recapture how many exist", () => {
    const section = searchesSection(result, searches);
    expect(section?.each.map(({ frames, found, coverage }) => [frames, found, coverage])).toEqual([
      [4, 3, 0.5],
      [2, 2, 0],
    ]);
    // (3 + 1)(2 + 1)/(2 + 1) - 1
    expect(section?.pair).toEqual({ first: 3, second: 2, both: 2, estimate: 3 });
    expect(searchesOf({ searches: section })).toEqual(searches);
    expect(searchSentence({ searches: section })).toMatch(/^2 searches were compared/);
  });

  it("are left out where all frames are of one", () => {
    expect(searchesSection(result, searches.slice(0, 1))).toBeUndefined();
    expect(searchesOf({})).toEqual([]);
    expect(searchSentence({})).toBeNull();
  });
});

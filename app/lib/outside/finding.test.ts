import { describe, expect, it } from "vitest";
import { nearestRows, outsideFinding } from "./finding.ts";

const rows = [0, 1, 2].map((index) => ({
  index,
  name: `c${index + 1}`,
  frame: 10 + index,
  relativeEnergy: 0.65 * index,
  population: [0.6, 0.3, 0.1][index]!,
}));
const found = { rmsd: [0.9, 0.4, 0.7], mirrorRmsd: [0.35, 1.2, 0.7], exact: [1, 1, 0] };

describe("conformers as they lie to a structure from outside", () => {
  it("come nearest first, with mirror images where they count", () => {
    const counted = nearestRows(rows, found, true);
    expect(counted.map(({ name, mirror, rmsd, otherHand }) => [name, mirror, rmsd, otherHand])).toEqual([
      ["c1", true, 0.35, 0.9],
      ["c2", false, 0.4, 1.2],
      ["c3", false, 0.7, 0.7],
    ]);
    expect(nearestRows(rows, found, false).map(({ name }) => name)).toEqual(["c2", "c3", "c1"]);
  });

  it("give a finding with strain, torsions and those that are near", () => {
    const torsions = [4, 19, 9].map((apart) => ({
      atoms: [0, 1, 2, 3] as [number, number, number, number],
      outside: 0,
      conformer: apart,
      apart,
    }));
    const near = nearestRows(rows, found, false);
    const labels = ["A", "B", "C"];
    const said = outsideFinding("pose.sdf", near, { strain: 2.96, near: 0.5, torsions, labels });
    expect(said?.text).toMatch(/nearest to c2, 0\.40\sÅ away\. The flask holds 30\s% of that shape/);
    expect(said?.text).toContain("strained by 2.31 more");
    expect(said?.second).toContain("Two of 3 torsions agree within 15°; B is turned by 19°.");
    expect(said?.second).toMatch(/One conformer lies within 0\.50/);
    const otherHand = { name: "c3", population: 0.1 };
    const apart = outsideFinding("pose.sdf", near, {
      strain: null,
      near: 0.5,
      torsions: [],
      labels,
      otherHand,
    });
    expect(apart?.second).toMatch(
      /^That counts one hand only: c3 is its mirror image and is kept apart, with 10\s% of its own\. One/,
    );
    expect(outsideFinding("x", [], { strain: null, near: 0.5, torsions: [], labels: [] })).toBeNull();
  });
});

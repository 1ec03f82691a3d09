import { describe, expect, test } from "vitest";
import type { KeptConformer } from "../recipe/result.ts";
import { chooseWeights, distinctPopulations } from "./populations.ts";

function conformer(frame: number, energy: number | null, degeneracy: number, symmetryNumber: number | null) {
  return {
    frame,
    relativeEnergy: energy,
    degeneracy,
    symmetryNumber,
    copies: symmetryNumber === null ? null : degeneracy / symmetryNumber / 0.5,
    mirrorRmsd: 0.5,
    found: 1,
  } satisfies KeptConformer;
}

// Pentane TT, TG, GG, GX: energies of Gruzman et al., J. Phys. Chem. A 2009, 113, 11974; symmetry numbers 2, 1, 2, 1.
const pentane = [
  conformer(1, 0, 1, 2),
  conformer(2, 0.614, 2, 1),
  conformer(3, 0.961, 2, 2),
  conformer(4, 2.813, 2, 1),
];

describe("pentane at 298.15 K", () => {
  test("copies 1 : 4 : 2 : 4 give 35.103, 49.813, 13.866, 1.217 %", () => {
    const set = distinctPopulations(pentane, "electronic", 298.15)!;
    expect([...set.weights.values]).toEqual([1, 4, 2, 4]);
    const found = [...set.populations].map((p) => 100 * p);
    for (const [i, expected] of [35.103, 49.813, 13.866, 1.217].entries())
      expect(found[i]).toBeCloseTo(expected, 3);
    expect(set.freeEnergy).toBeCloseTo(-0.62026, 5);
    expect(set.effectiveCount).toBeCloseTo(6.3332, 4);
  });

  test("the mirror factor alone gives 47.1, 33.4, 18.6, 0.8 %, which is right only for free energies", () => {
    const set = distinctPopulations(pentane, "free", 298.15)!;
    expect(set.weights.kind).toBe("degeneracy");
    const found = [...set.populations].map((p) => 100 * p);
    for (const [i, expected] of [47.1, 33.4, 18.6, 0.8].entries()) expect(found[i]).toBeCloseTo(expected, 1);
  });
});

describe("which weights", () => {
  test("a choice is followed and said", () => {
    expect(chooseWeights(pentane, "electronic", "degeneracy").reason).toMatch(/as you chose/);
    expect(chooseWeights(pentane, "free", "copies").kind).toBe("copies");
  });

  test("an unknown symmetry number turns copies into degeneracy, and says so", () => {
    const unknown = [conformer(1, 0, 1, 2), conformer(2, 1, 2, null)];
    const weights = chooseWeights(unknown, "electronic", "copies");
    expect(weights.kind).toBe("degeneracy");
    expect([...weights.values]).toEqual([1, 2]);
    expect(weights.reason).toMatch(/could not be counted/);
  });
});

test("nothing to weigh is null, not zero", () => {
  expect(distinctPopulations([], "electronic", 298.15)).toBeNull();
  expect(distinctPopulations([conformer(1, null, 1, 1)], "electronic", 298.15)).toBeNull();
});

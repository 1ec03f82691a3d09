import { describe, expect, it } from "vitest";
import {
  BESIDE,
  besidePresent,
  COPIED,
  type ExpectedSift,
  type ExpectedThermo,
  type ReferenceSet,
  readReference,
} from "../../../tests/factories/reference.ts";
import { makePlan, type SymmetryPlan } from "../align/plan.ts";
import { writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import type { AtomSet } from "../structure.ts";
import { weigh } from "../thermo/boltzmann.ts";
import type { SiftRecipe } from "./recipe.ts";
import type { KeptConformer } from "./result.ts";
import { runSift } from "./run.ts";

/**
 * Every distinct set of the reference ensembles (fixtures/README.md): computed by another program in another
 * language, its RMSDs compared with RDKit, entropy and heat capacity with derivatives of the free energy.
 */

const RMSD_TOLERANCE = 1e-5;
const THERMO_TOLERANCE = 1e-8;

function recipeFor(expected: ExpectedSift): SiftRecipe {
  return {
    version: 1,
    level: "level",
    levelName: "level",
    window: null,
    energyTolerance: expected.e_tol,
    rmsdTolerance: expected.r_tol,
    atoms: expected.atoms,
    symmetry: true,
    mirror: expected.mirror_merged ? "merge" : "keep",
    chirality: "achiral",
    chiralityOverridden: false,
  };
}

function siftAs(set: ReferenceSet, expected: ExpectedSift) {
  const count = set.frames.block.count;
  return runSift({
    graph: set.graph,
    block: set.frames.block,
    numbers: Int32Array.from({ length: count }, (_, k) => k + 1),
    energies: { values: set.energies, present: new Uint8Array(count).fill(1), kcalPerUnit: 1 },
    recipe: recipeFor(expected),
  });
}

function expectThermo(kept: readonly KeptConformer[], expected: ExpectedThermo) {
  const weights = kept.map((k) => (expected.weights === "copies" ? k.copies! : k.degeneracy));
  const found = weigh(
    kept.map((k) => k.relativeEnergy!),
    weights,
    expected.T_K,
  );
  // Reference values carry ten digits: larger ones are compared relatively.
  const near = (value: number, reference: number) =>
    expect(Math.abs(value - reference)).toBeLessThan(THERMO_TOLERANCE * Math.max(1, Math.abs(reference)));
  near(found.freeEnergy, expected.G_conf_kcal_mol);
  near(found.energy, expected.mean_energy_kcal_mol);
  near(found.entropy, expected.S_conf_cal_mol_K);
  near(found.heatCapacity, expected.Cv_conf_cal_mol_K);
  expected.populations.forEach((p, k) => {
    near(found.populations[k]!, p);
  });
  near(found.effectiveCount, Math.exp(expected.S_conf_cal_mol_K / 1.987204258640832));
}

function checkDistinct(set: ReferenceSet, expected: ExpectedSift) {
  const { kept, dropped } = siftAs(set, expected);
  expect(kept.map((k) => k.frame - 1)).toEqual(expected.kept);
  const owner = expected.owner.map((_, frame) => frame);
  for (const d of dropped) owner[d.frame - 1] = d.repeats - 1;
  expect(owner).toEqual(expected.owner);
  kept.forEach((k, i) => {
    expect(Math.abs(k.mirrorRmsd - expected.mirror_rmsd[i]!)).toBeLessThan(RMSD_TOLERANCE);
    expect(k.found).toBe(expected.owner.filter((o) => o === expected.kept[i]).length);
    expect(k.upperBound).toBeUndefined();
  });
  expect(kept.map((k) => k.symmetryNumber)).toEqual(expected.symmetry_number);
  for (const d of dropped) {
    expect(d.rmsd).toBeLessThanOrEqual(expected.r_tol);
    expect(d.energyDifference).toBeLessThanOrEqual(expected.e_tol);
    expect(d.energyDifference).toBeGreaterThanOrEqual(0);
  }
  // The reference keeps degeneracy 1 in merged lists of chiral molecules; a merge there is refused in the product
  // or has the chirality overridden, so that only `kept` and `owner` can be compared.
  if (!set.achiral && expected.mirror_merged) return;
  expect(kept.map((k) => k.degeneracy)).toEqual(expected.degeneracy);
  kept.forEach((k, i) => {
    expect(k.copies).toBeCloseTo(expected.copies[i]!, 9);
  });
  for (const thermo of expected.thermo) expectThermo(kept, thermo);
}

function shapes(plan: SymmetryPlan, set: ReferenceSet): Float64Array {
  const { atoms, count, positions } = set.frames.block;
  const all = new Float64Array(plan.shapeLength * count);
  for (let f = 0; f < count; f++) writeShape(plan, positions, 3 * atoms * f, all, plan.shapeLength * f);
  return all;
}

function checkPairs(set: ReferenceSet, atoms: AtomSet) {
  const plan = makePlan(set.graph, atoms);
  const fixed = makePlan(set.graph, atoms, { symmetry: false });
  const [free, plain] = [shapes(plan, set), shapes(fixed, set)];
  const [comparer, byIndex] = [new SymmetricRmsd(plan), new SymmetricRmsd(fixed)];
  for (const pair of set.pairs.filter((p) => p.atoms === atoms)) {
    const at = (p: SymmetryPlan, frame: number) => frame * p.shapeLength;
    const proper = comparer.minimum(free, at(plan, pair.i), free, at(plan, pair.j));
    const either = comparer.minimum(free, at(plan, pair.i), free, at(plan, pair.j), true);
    const index = byIndex.minimum(plain, at(fixed, pair.i), plain, at(fixed, pair.j));
    expect(proper.exact && either.exact).toBe(true);
    expect(Math.abs(proper.rmsd - pair.best_rmsd)).toBeLessThan(RMSD_TOLERANCE);
    expect(Math.abs(either.rmsd - pair.best_rmsd_mirror_allowed)).toBeLessThan(RMSD_TOLERANCE);
    expect(Math.abs(index.rmsd - pair.plain_kabsch_rmsd_no_symmetry)).toBeLessThan(RMSD_TOLERANCE);
    expect(proper.rmsd).toBeLessThanOrEqual(index.rmsd + 1e-12);
  }
}

function checkSet(file: string, expected: string) {
  const set = readReference(file, expected);
  expect(set.distinct.length).toBeGreaterThanOrEqual(12);
  expect(set.pairs.length).toBeGreaterThan(0);
  for (const [atoms, facts] of Object.entries(set.atomSets) as [
    AtomSet,
    { n_atoms: number; n_automorphisms: number },
  ][]) {
    const plan = makePlan(set.graph, atoms);
    expect([plan.n, plan.chain.order]).toEqual([facts.n_atoms, facts.n_automorphisms]);
    checkPairs(set, atoms);
  }
  expect([...set.graph.bonds]).toEqual(set.bonds.flat());
  for (const entry of set.distinct) checkDistinct(set, entry);
}

describe("distinct sets of the reference ensembles", () => {
  it.each(COPIED)("%s", (file, expected) => checkSet(file, expected));
});

describe.skipIf(!besidePresent)("distinct sets of published conformers (../shared/reference)", () => {
  it.each(BESIDE)("%s", (file, expected) => checkSet(file, expected));
});

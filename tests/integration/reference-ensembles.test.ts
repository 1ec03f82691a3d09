import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { makeLab, reference, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

// Expected results: fixtures/reference, made by an independent program; tolerances of its README, section 6.
const ENSEMBLES = [
  { name: "difluoroethane", energyUnit: "kcal/mol" },
  { name: "ac-ala-nhme", energyUnit: "kcal/mol" },
  { name: "ac-ala-nhme-loose", energyUnit: "kcal/mol" },
  { name: "aryl-ether", energyUnit: "kcal/mol" },
  // Its comment names the unit.
  { name: "aminoester", energyUnit: undefined },
] as const;

interface Expected {
  achiral_molecule: boolean;
  n_frames: number;
  n_atoms: number;
  distinct: {
    atoms: string;
    mirror_merged: boolean;
    e_tol: number;
    r_tol: number;
    kept: number[];
    owner: number[];
    degeneracy: number[];
    symmetry_number: number[];
    copies: number[];
    mirror_rmsd: number[];
    thermo: {
      weights: string;
      T_K: number;
      G_conf_kcal_mol: number;
      mean_energy_kcal_mol: number;
      S_conf_cal_mol_K: number;
      Cv_conf_cal_mol_K: number;
      populations: number[];
    }[];
  }[];
}

function expectedOf(name: string): Expected {
  const path = fileURLToPath(
    new URL(`../../fixtures/reference/ensembles/${name}.expected.json`, import.meta.url),
  );
  return JSON.parse(readFileSync(path, "utf8"));
}

let jobs: Awaited<ReturnType<typeof withJobs>>;
let token: string;
beforeAll(async () => {
  jobs = await withJobs();
  ({ token } = await makeLab());
});
afterAll(() => jobs.stop());

describe.each(ENSEMBLES)("$name, from upload to populations over the API", ({ name, energyUnit }) => {
  const expected = expectedOf(name);
  let ensembleId: string;
  beforeAll(async () => {
    const unit: Record<string, string> = energyUnit === undefined ? {} : { energyUnit };
    const files = [{ name: `${name}.xyz`, content: reference(`ensembles/${name}.xyz`) }];
    const taken = await takenIn(token, files, { level: "MMFF94", ...unit });
    expect(taken.intake.frames).toBe(expected.n_frames);
    expect(taken.intake.held).toBe(0);
    expect(taken.atoms).toBe(expected.n_atoms);
    expect(taken.levels).toMatchObject([{ name: "MMFF94", count: expected.n_frames, missing: 0 }]);
    ensembleId = taken.id;
  });

  it.each(
    expected.distinct.map((set) => ({
      ...set,
      title: `${set.atoms}, ${set.mirror_merged ? "merged" : "apart"}, ${set.r_tol} Å`,
    })),
  )("$title", async (set) => {
    // In a chiral molecule the merged lists test the arithmetic: reached by overriding the chirality.
    const override = set.mirror_merged && !expected.achiral_molecule ? { chirality: "achiral" } : {};
    const sift = await sifted(token, ensembleId, {
      level: "MMFF94",
      energyTolerance: set.e_tol,
      rmsdTolerance: set.r_tol,
      atoms: set.atoms,
      mirror: set.mirror_merged ? "merge" : "keep",
      ...override,
    });
    expect(sift.status, sift.error ?? "").toBe("done");
    const result = sift.result;
    expect(result).not.toBeNull();
    if (result === null) return;

    expect(result.kept.map((one) => one.frame - 1)).toEqual(set.kept);
    const owner = new Map(result.kept.map((one) => [one.frame - 1, one.frame - 1]));
    for (const dropped of result.dropped) owner.set(dropped.frame - 1, dropped.repeats - 1);
    expect(set.owner.map((_, frame) => owner.get(frame))).toEqual(set.owner);
    expect(result.kept.map((one) => one.symmetryNumber)).toEqual(set.symmetry_number);
    for (const [at, one] of result.kept.entries()) {
      expect(Math.abs(one.mirrorRmsd - (set.mirror_rmsd[at] ?? 0))).toBeLessThan(1e-5);
    }
    // Of the merged lists of chiral molecules only kept and owner are reached (fixtures/reference/README.md).
    if (override.chirality) return;
    expect(result.kept.map((one) => one.degeneracy)).toEqual(set.degeneracy);
    expect(result.kept.map((one) => one.copies)).toEqual(set.copies);
    for (const thermo of set.thermo) {
      const path = `/api/v1/sifts/${sift.id}/populations?temperature=${thermo.T_K}&weights=${thermo.weights}`;
      const found = await (await call(path, { token })).json();
      const populations = found.conformers.map((one: { population: number }) => one.population);
      for (const [at, population] of populations.entries()) {
        expect(Math.abs(population - (thermo.populations[at] ?? 0))).toBeLessThan(1e-8);
      }
      expect(Math.abs(found.freeEnergy - thermo.G_conf_kcal_mol)).toBeLessThan(1e-7);
      expect(Math.abs(found.energy - thermo.mean_energy_kcal_mol)).toBeLessThan(1e-7);
      expect(Math.abs(found.entropy - thermo.S_conf_cal_mol_K)).toBeLessThan(1e-6);
      expect(Math.abs(found.heatCapacity - thermo.Cv_conf_cal_mol_K)).toBeLessThan(1e-6);
    }
  });
});

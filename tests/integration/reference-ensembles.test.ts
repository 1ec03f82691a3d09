import { existsSync, readFileSync } from "node:fs";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { BESIDE, beside, besidePresent, COPIED, fixtures } from "../factories/reference";
import { makeLab, sifted, takenIn, withJobs } from "../factories/upload";
import { call } from "../setup/app";

// Expected results: fixtures/reference and ../shared/reference, made by an independent program; tolerances of the README
// there, section 6. The published geometries may not be copied and are read where they lie beside the checkout.
const MOLECULES: { title: string; file: string; expected: string; fields: Record<string, string> }[] = [
  ...[...COPIED, ...(besidePresent ? BESIDE : [])].map(([file, expected]) => ({
    title: expected,
    file,
    expected,
    fields: fieldsOf(file),
  })),
];

/** The comments of the published files and of the aminoester name the unit; the others leave it to the sender. */
function fieldsOf(file: string): Record<string, string> {
  // Two energies in every record, each with its unit in the tag.
  if (file.endsWith(".sdf")) return { level: "Reference", energyFrom: "field:MMFF94_ENERGY_KCAL_MOL" };
  const named = file.includes("published") || file.includes("aminoester");
  return { level: "Reference", ...(named ? {} : { energyUnit: "kcal/mol" }) };
}

const contentOf = (path: string) =>
  readFileSync(existsSync(fixtures + path) ? fixtures + path : beside + path);

interface Expected {
  achiral_molecule: boolean;
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
  const json = JSON.parse(contentOf(`${name}.expected.json`).toString());
  // Files of several levels keep the geometric part one step further down.
  return json.geometry ?? json;
}

let jobs: Awaited<ReturnType<typeof withJobs>>;
let token: string;
beforeAll(async () => {
  jobs = await withJobs();
});
// A token each: together they make more calls a minute than one may.
const newToken = async () => {
  ({ token } = await makeLab());
};
afterAll(() => jobs.stop());

describe.each(MOLECULES)(
  "$title, from upload to populations over the API",
  ({ file, expected: name, fields }) => {
    const expected = expectedOf(name);
    const frames = expected.distinct[0]?.owner.length ?? 0;
    let ensembleId: string;
    beforeAll(async () => {
      await newToken();
      const taken = await takenIn(
        token,
        [{ name: file.replace("/", " "), content: contentOf(file) }],
        fields,
      );
      expect(taken.intake).toMatchObject({ frames, accepted: frames, held: 0 });
      expect(taken.levels).toMatchObject([
        { name: "Reference", unit: "kcal/mol", count: frames, missing: 0 },
      ]);
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
        level: "Reference",
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
  },
);

// ../shared/reference/README.md, section 2: distinct sets that RDKit's RMSD gives too.
describe.skipIf(!besidePresent)("large ensembles, hartree in the comment", () => {
  beforeAll(newToken);
  it.each([
    ["S", 500, 346],
    ["M", 2_000, 582],
  ])("%s.xyz.gz: %i frames, %i distinct", async (name, frames, distinct) => {
    const file = { name: `${name}.xyz.gz`, content: readFileSync(`${beside}large/${name}.xyz.gz`) };
    const taken = await takenIn(token, [file], { level: "Reference", energyUnit: "hartree" });
    expect(taken.intake).toMatchObject({ frames, accepted: frames });
    const sift = await sifted(token, taken.id, {
      level: "Reference",
      energyTolerance: 0.12,
      rmsdTolerance: 0.15,
      atoms: "heavy",
      mirror: "keep",
    });
    expect(sift.result?.kept).toHaveLength(distinct);
  });
});

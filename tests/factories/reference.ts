import { existsSync, readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import type { AtomSet, Graph } from "../../app/lib/structure.ts";
import { graphOf, readSdf, readXyz, type TestFrames } from "./read-xyz.ts";

/** Expected results as fixtures/README.md describes them; indices count frames from 0. */
export interface ExpectedSift {
  atoms: AtomSet;
  mirror_merged: boolean;
  e_tol: number;
  r_tol: number;
  kept: number[];
  owner: number[];
  degeneracy: number[];
  mirror_rmsd: number[];
  symmetry_number: (number | null)[];
  copies: (number | null)[];
  thermo: ExpectedThermo[];
}

export interface ExpectedThermo {
  weights: "degeneracy" | "copies";
  T_K: number;
  Q: number;
  G_conf_kcal_mol: number;
  mean_energy_kcal_mol: number;
  S_conf_cal_mol_K: number;
  Cv_conf_cal_mol_K: number;
  populations: number[];
}

export interface ExpectedPair {
  atoms: AtomSet;
  i: number;
  j: number;
  best_rmsd: number;
  best_rmsd_mirror_allowed: number;
  plain_kabsch_rmsd_no_symmetry: number;
}

export interface ReferenceSet {
  frames: TestFrames;
  graph: Graph;
  /** kcal/mol. */
  energies: Float64Array;
  achiral: boolean;
  bonds: [number, number][];
  atomSets: Partial<Record<AtomSet, { n_atoms: number; n_automorphisms: number }>>;
  distinct: ExpectedSift[];
  pairs: ExpectedPair[];
}

/** Files that were copied. */
export const fixtures = fileURLToPath(new URL("../../fixtures/reference/", import.meta.url));
/** Published geometries that may not be copied lie beside the checkout, or nowhere. */
export const beside = fileURLToPath(new URL("../../../shared/reference/", import.meta.url));
export const besidePresent = existsSync(beside);

/** Structure file and expected results; those of the second list need `besidePresent`. */
export const COPIED = [
  ["ensembles/difluoroethane.xyz", "ensembles/difluoroethane"],
  ["ensembles/ac-ala-nhme.xyz", "ensembles/ac-ala-nhme"],
  ["ensembles/ac-ala-nhme-loose.xyz", "ensembles/ac-ala-nhme-loose"],
  ["ensembles/aryl-ether.xyz", "ensembles/aryl-ether"],
  ["ensembles/tosylamide.sdf", "ensembles/tosylamide"],
  ["ensembles/aminoester.xyz", "ensembles/aminoester"],
  ["ac-ala-levels/ac-ala-nhme.mmff94.xyz", "ac-ala-levels/ac-ala-nhme"],
] as const;
export const BESIDE = [
  ["alkane-conformers/butane.published.xyz", "alkane-conformers/butane"],
  ["alkane-conformers/pentane.published.xyz", "alkane-conformers/pentane"],
  ["alkane-conformers/hexane.published.xyz", "alkane-conformers/hexane"],
  ["cysteine-conformers/cysteine.published.xyz", "cysteine-conformers/cysteine"],
] as const;

export function readReference(file: string, expected: string): ReferenceSet {
  const folder = existsSync(fixtures + file) ? fixtures : beside;
  const frames = file.endsWith(".sdf")
    ? readSdf(folder + file, "MMFF94_ENERGY_KCAL_MOL")
    : readXyz(folder + file);
  const json = JSON.parse(readFileSync(`${folder}${expected}.expected.json`, "utf8"));
  // Conformer files keep the geometric part one step further down.
  const geometry = json.geometry ?? json;
  return {
    frames,
    graph: graphOf(frames),
    energies: Float64Array.from(frames.comments, energyOf),
    achiral: geometry.achiral_molecule,
    bonds: geometry.bonds_0based,
    atomSets: geometry.atom_sets,
    distinct: geometry.distinct,
    pairs: geometry.pairs,
  };
}

function energyOf(comment: string): number {
  const labelled = comment.match(/(?:energy[:=]\s*|E = |relative energy )(-?[\d.]+)/);
  return Number(labelled ? labelled[1] : comment);
}

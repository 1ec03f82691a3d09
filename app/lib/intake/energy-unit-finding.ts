import { type EnergyUnit, HARTREE_EV, kcalPer } from "../units.ts";
import type { EnergyCandidate } from "./energies.ts";
import { WIDE_KCAL } from "./energy-remarks.ts";

export type UnitEvidence =
  /** A unit word is bound to the number in every frame: unambiguous. */
  | "bound"
  /** Unit words disagree, or stand in some frames only. */
  | "mixed"
  /** Words or a smallest value of 0 say that it is relative: nothing to check against (row E09). */
  | "relative"
  /** Close to the sum of isolated atoms (row E07). */
  | "atoms"
  /** Writers of extended XYZ commonly mean eV (row E05). */
  | "custom"
  | "none";

export interface UnitFinding {
  /** Settled without asking; null where the unit must be asked. */
  readonly unit: EnergyUnit | null;
  /** Proposed, to be confirmed; null where nothing speaks for one. */
  readonly proposed: EnergyUnit | null;
  readonly evidence: UnitEvidence;
}

/** Isolated atoms in hartree by atomic number: formats page, row E07. */
const ATOM_HARTREE: Readonly<Record<number, number>> = {
  1: -0.5,
  6: -37.8,
  7: -54.6,
  8: -75.1,
  9: -99.7,
  16: -398,
  17: -460,
};
const ATOM_TOLERANCE = 0.01;

/**
 * The unit of a candidate's values, from what the file says of it.
 *
 * @param elements atomic numbers of the molecule
 * @example findUnit(candidate, Uint8Array.of(8, 1, 1)).evidence // "atoms" for -76.03
 */
export function findUnit(candidate: EnergyCandidate, elements: ArrayLike<number>): UnitFinding {
  const units = [...candidate.unitRows.keys()];
  const [only] = units;
  if (only !== undefined) {
    if (units.length === 1 && candidate.unitless === 0)
      return { unit: only, proposed: only, evidence: "bound" };
    return { unit: null, proposed: units.length === 1 ? only : null, evidence: "mixed" };
  }
  if (candidate.relative || candidate.min === 0) return { unit: null, proposed: null, evidence: "relative" };
  const fitting = unitByAtoms(candidate, elements);
  if (fitting !== null) return { unit: null, proposed: fitting, evidence: "atoms" };
  const customary = candidate.customary && spreadKcal(candidate, "eV") <= WIDE_KCAL;
  if (customary) return { unit: null, proposed: "eV", evidence: "custom" };
  return { unit: null, proposed: null, evidence: "none" };
}

/** kcal/mol between the lowest and the highest value if they are in `unit`. Subtracted first, converted once. */
export function spreadKcal(candidate: Pick<EnergyCandidate, "min" | "max">, unit: EnergyUnit): number {
  return (candidate.max - candidate.min) * kcalPer(unit);
}

/**
 * The unit in which energies come within 1 % of the sum of the isolated atoms (row E07); null where none does.
 *
 * @param range lowest and highest value as written
 * @example unitByAtoms({ min: -76.03, max: -76.02 }, Uint8Array.of(8, 1, 1)) // "hartree"
 */
export function unitByAtoms(
  range: { readonly min: number; readonly max: number },
  elements: ArrayLike<number>,
): EnergyUnit | null {
  let sum = 0;
  for (let k = 0; k < elements.length; k++) {
    const atom = ATOM_HARTREE[elements[k]!];
    if (atom === undefined) return null;
    sum += atom;
  }
  if (sum === 0) return null;
  const scales: readonly (readonly [EnergyUnit, number])[] = [
    ["hartree", 1],
    ["eV", HARTREE_EV],
    ["kcal/mol", kcalPer("hartree")],
    ["kJ/mol", kcalPer("hartree") / kcalPer("kJ/mol")],
  ];
  const fits = (value: number, scale: number) => Math.abs(value / scale / sum - 1) <= ATOM_TOLERANCE;
  return scales.find(([, scale]) => fits(range.min, scale) && fits(range.max, scale))?.[0] ?? null;
}

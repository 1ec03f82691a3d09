import { ENERGY_UNITS, type EnergyUnit, kcalPer } from "../units.ts";
import type { EnergyAnswers } from "./decide-energies.ts";
import type { EnergyCandidate, EnergyFindings } from "./energies.ts";
import { WIDE_KCAL } from "./energy-remarks.ts";
import { findUnit } from "./energy-unit-finding.ts";
import type { IntakeMessage } from "./report.ts";

/** The level that an ensemble's own files brought, with the values that it has. */
export interface OwnLevel {
  name: string;
  /** `key:NAME`, `number:N` or `field:NAME`. */
  origin: string;
  unit: EnergyUnit;
  energyKind: EnergyAnswers["energyKind"];
  temperature: number | null;
  /** Of the values that are there; both null without any. */
  lowest: number | null;
  highest: number | null;
}

/**
 * What is taken as said of the energies of a further batch: the request's own words, and where it has none those of the
 * ensemble, if the files are alike. They are where the same number stands in them and, unless a unit stands beside it,
 * its values lie where the ensemble's do.
 *
 * @param findings of a scan for the number that `stated` or the level names
 * @param elements atomic numbers of the molecule
 * @example batchAnswers(findings, elements, stated, level).level // "MMFF94"
 */
export function batchAnswers(
  findings: EnergyFindings,
  elements: ArrayLike<number>,
  stated: EnergyAnswers,
  level: OwnLevel | null,
): EnergyAnswers {
  const { chosen } = findings;
  if (level === null || chosen === null) return stated;
  const named = stated.level ?? level.name;
  if (named !== level.name) return stated;
  const found = findUnit(chosen, elements).unit;
  const unit = stated.energyUnit ?? found ?? (liesWithin(chosen, level) ? level.unit : null);
  return {
    energyFrom: chosen.from,
    energyUnit: unit,
    level: named,
    energyKind: level.energyKind,
    energyTemperature: level.temperature,
  };
}

/** Conformers of one molecule at one level lie within about 100 kcal/mol; another unit puts them elsewhere. */
function liesWithin({ count, min, max }: EnergyCandidate, { unit, lowest, highest }: OwnLevel): boolean {
  if (count === 0 || lowest === null || highest === null) return true;
  const slack = WIDE_KCAL / kcalPer(unit);
  return max <= highest + slack && min >= lowest - slack;
}

/**
 * Two searches whose lowest energy is 0 each counts from its own lowest conformer, and nobody can tell how far these lie
 * apart (row E09).
 */
export function relativeZeros(
  batch: { lowest: number | null; file: string },
  level: Pick<OwnLevel, "lowest" | "name"> | null,
): IntakeMessage[] {
  if (batch.lowest !== 0 || level?.lowest !== 0) return [];
  return [
    {
      code: "E09",
      severity: "remark",
      file: batch.file,
      message: `The lowest energy of this batch is 0, as that of “${level.name}” was: if each counts from its own lowest conformer, they cannot be compared.`,
      hint: "Bring total energies, or energies from one common zero.",
    },
  ];
}

/** A unit of the four and more that values may be written in; null for any other text. */
export function asEnergyUnit(text: string | null): EnergyUnit | null {
  return ENERGY_UNITS.find((unit) => unit === text) ?? null;
}

import { type EnergyUnit, kcalPer } from "../units.ts";
import type { EnergyCandidate, EnergyFindings } from "./energies.ts";
import { NARROW_KCAL, WIDE_KCAL } from "./energy-remarks.ts";
import { findUnit, spreadKcal, type UnitFinding } from "./energy-unit-finding.ts";
import type { IntakeQuestion, QuestionOption } from "./report.ts";

/** Numbers beyond these are not offered; they can still be named by a request. */
const MAX_OPTIONS = 12;
/** Offered always, the four that a request may state; others where the file names them. */
const OFFERED_UNITS: readonly EnergyUnit[] = ["kcal/mol", "kJ/mol", "eV", "hartree"];

/**
 * "Which number is the energy?" with every candidate, its values in the first three frames and a word on each.
 *
 * @param elements atomic numbers of the molecule
 * @returns null where there is nothing to choose from
 */
export function energyFromQuestion(
  findings: EnergyFindings,
  elements: ArrayLike<number>,
): IntakeQuestion | null {
  const shown = findings.candidates.slice(0, MAX_OPTIONS);
  if (shown.length === 0) return null;
  const count = shown.length === 1 ? "one number" : `${numberWord(findings.candidates.length)} numbers`;
  const fields = shown.some(({ from }) => from.startsWith("field:"));
  const comments = shown.some(({ from }) => !from.startsWith("field:"));
  const where = fields ? (comments ? "data fields and comment lines" : "data fields") : "comment lines";
  return {
    id: "energy-from",
    code: "energy-from",
    text: "Which number is the energy?",
    reason: `The ${where} carry ${count}. Here ${shown.length === 1 ? "it is" : "they are"} for the first frames.`,
    options: shown.map((candidate) => fromOption(candidate, findings, elements)),
  };
}

function numberWord(count: number): string {
  return (
    ["no", "one", "two", "three", "four", "five", "six", "seven", "eight", "nine"][count] ?? String(count)
  );
}

function fromOption(
  candidate: EnergyCandidate,
  findings: EnergyFindings,
  elements: ArrayLike<number>,
): QuestionOption {
  const unit = findUnit(candidate, elements).proposed;
  const proposed = candidate === findings.proposed;
  const spread = unit === null ? null : spreadKcal(candidate, unit);
  const missing =
    candidate.count < candidate.total ? ` In ${candidate.count} of ${candidate.total} frames.` : "";
  return {
    id: candidate.from,
    text: candidate.key ?? `Number ${candidate.position} of the comment line`,
    detail: `${proposed ? proposalWords(candidate, spread, elements.length) : otherWords(candidate)}${missing}`,
    values: [...candidate.first],
    spreadKcal: spread,
    spread: candidate.count > 1 ? candidate.max - candidate.min : null,
    proposed,
  };
}

function proposalWords(candidate: EnergyCandidate, spread: number | null, atoms: number): string {
  const fits = spread !== null && spread >= NARROW_KCAL && spread <= WIDE_KCAL;
  const why = {
    energy: "it names an energy",
    unit: "a unit of energy stands beside it",
    loose: "it has decimals and no other name",
    whole: "",
    other: "",
  }[candidate.class];
  return fits ? `Proposed: ${why}, and its spread fits ${atoms} atoms.` : `Proposed: ${why}.`;
}

function otherWords(candidate: EnergyCandidate): string {
  if (candidate.countsUp) return "Counts up by one: a label, not an energy.";
  if (candidate.min === candidate.max && candidate.count > 1) return "The same in all frames.";
  switch (candidate.class) {
    case "energy":
      return "Names an energy too; can be added later as a second level.";
    case "unit":
      return "A unit of energy stands beside it.";
    case "loose":
      return "Not named; could be an energy.";
    case "whole":
      return "Whole numbers only.";
    case "other":
      return "Named as something else.";
  }
}

/**
 * "In which unit?" with the spread that each unit would mean (row E08).
 *
 * @example energyUnitQuestion(candidate, findUnit(candidate, elements)).options.map((option) => option.spreadKcal)
 */
export function energyUnitQuestion(candidate: EnergyCandidate, finding: UnitFinding): IntakeQuestion {
  const written = [...candidate.unitRows.keys()];
  // With two units beside it one of them is meant: another would leave no frame with an energy.
  const units = new Set<EnergyUnit>(written.length > 1 ? written : [...OFFERED_UNITS, ...written]);
  const proposed = finding.proposed;
  const ordered = [...units].sort(
    (a, b) => Number(b === proposed) - Number(a === proposed) || kcalPer(a) - kcalPer(b),
  );
  return {
    id: "energy-unit",
    code: "energy-unit",
    text: "In which unit?",
    reason: `${evidenceWords(candidate, finding)} ${firstWords(candidate)}The implied spread tells whether a unit can be right.`,
    options: ordered.map((unit) => unitOption(candidate, finding, unit)),
  };
}

/** The numbers as written in the first three frames: a unit is confirmed with them in sight. */
function firstWords({ first }: EnergyCandidate): string {
  const written = first.filter((value) => value !== null);
  return written.length === 0
    ? ""
    : `${written.length === 1 ? "The first value is" : "The first values are"} ${written.map((value) => value.slice(0, 30)).join(", ")}. `;
}

function evidenceWords(candidate: EnergyCandidate, finding: UnitFinding): string {
  const name = candidate.key === null ? "the number" : `“${candidate.key.slice(0, 60)}”`;
  switch (finding.evidence) {
    case "bound":
      return `A unit stands beside ${name}: ${finding.unit}.`;
    case "mixed":
      return candidate.unitRows.size > 1
        ? `Different units stand beside ${name}: ${unitsInWords(candidate)}. Frames with another unit than the answer stay without energy.`
        : `A unit stands beside ${name} in some frames only.`;
    case "relative":
      return `The values of ${name} are relative, so the unit cannot be checked against the atoms.`;
    case "atoms":
      return `The file names no unit for ${name}; the values come close to the sum of the isolated atoms in ${finding.proposed}.`;
    case "custom":
      return `The file names no unit for ${name}; writers of extended XYZ commonly mean eV.`;
    case "none":
      return `The file names no unit for ${name}.`;
  }
}

/**
 * Which units stand beside a number, and in how many frames.
 *
 * @example unitsInWords(candidate) // "kcal/mol in 2 frames, kJ/mol in 1 frame"
 */
export function unitsInWords({ unitRows }: Pick<EnergyCandidate, "unitRows">): string {
  return [...unitRows]
    .map(([unit, rows]) => `${unit} in ${rows.length === 1 ? "1 frame" : `${rows.length} frames`}`)
    .join(", ");
}

function unitOption(candidate: EnergyCandidate, finding: UnitFinding, unit: EnergyUnit): QuestionOption {
  const spread = candidate.count > 1 ? spreadKcal(candidate, unit) : null;
  const proposed = unit === finding.proposed;
  return { id: unit, text: unit, detail: unitWords(finding, spread, proposed), spreadKcal: spread, proposed };
}

function unitWords(finding: UnitFinding, spread: number | null, proposed: boolean): string {
  const span = spreadWords(spread);
  if (!proposed) return span ?? "Possible";
  const why = {
    bound: "the file says so",
    mixed: "the file says so in some frames",
    atoms: "within 1 % of the isolated atoms",
    custom: "usual in extended XYZ",
    relative: "",
    none: "",
  }[finding.evidence];
  return span === null ? `Proposed: ${why}` : `Proposed: ${why}. ${span}`;
}

/** The word on a spread; null where it is what conformers of one molecule show. */
function spreadWords(spread: number | null): string | null {
  if (spread === null) return "One value: no spread to judge by";
  if (spread > WIDE_KCAL) return "Wider than conformers of one molecule";
  return spread < NARROW_KCAL ? "Narrower than conformers of one molecule" : null;
}

import { DomainError, type Fault } from "../errors.ts";
import { ENERGY_UNITS, type EnergyUnit } from "../units.ts";
import type { EnergyKind } from "../views.ts";
import type { EnergyCandidate, EnergyFindings } from "./energies.ts";
import { placeWords } from "./energy-column.ts";
import { energyFromQuestion, energyUnitQuestion, unitsInWords } from "./energy-questions.ts";
import { unreadableEnergy } from "./energy-remarks.ts";
import { findUnit } from "./energy-unit-finding.ts";
import { suggestLevel } from "./level-name.ts";
import type { IntakeMessage, IntakeQuestion, QuestionOption } from "./report.ts";

/** What has been said about the energies of an upload; null where nobody did. */
export interface EnergyAnswers {
  energyUnit: string | null;
  /** `key:NAME`, `number:N`, `field:NAME`, or "none": the files hold no energy. */
  energyFrom: string | null;
  level: string | null;
  energyKind: EnergyKind;
  energyTemperature: number | null;
}

/** Whether somebody said which kind of energy it is: any kind but the default says it by itself. */
export function kindWasStated(answers: { energyKind: EnergyKind; kindStated?: boolean }): boolean {
  return answers.kindStated ?? answers.energyKind !== "electronic";
}

/** Answer to the question for the number, and to that for the unit, where it is no energy at all. */
export const NO_ENERGY = "none";

export interface DecisionMode {
  /** A program cannot be asked for unit and level: leaving them open is refused. */
  refuseOpen: boolean;
  /** A person confirms the unit even where the file names one. */
  confirmUnit: boolean;
  /** Levels in use nearby, likeliest first. */
  knownLevels: readonly string[];
  /** Comment line of the first frame, which may name the level. */
  comment: string;
}

export type EnergyDecision =
  | { kind: "none"; messages: IntakeMessage[] }
  | { kind: "ask"; questions: IntakeQuestion[] }
  | {
      kind: "column";
      candidate: EnergyCandidate;
      unit: EnergyUnit;
      level: string;
      messages: IntakeMessage[];
    };

/**
 * What to do with the energies of an upload: take a column, take none, or ask.
 *
 * @param findings of a scan that was given `answers.energyFrom` where that is set
 * @param elements atomic numbers of the molecule
 * @throws DomainError invalid where `mode.refuseOpen` and unit or level are open
 * @example decideEnergies(findings, elements, answers, mode).kind // "column"
 */
export function decideEnergies(
  findings: EnergyFindings,
  elements: ArrayLike<number>,
  answers: EnergyAnswers,
  mode: DecisionMode,
): EnergyDecision {
  if (answers.energyFrom === NO_ENERGY) return { kind: "none", messages: [] };
  if (findings.verdict === "none") {
    return { kind: "none", messages: [...unreadable(findings), ...unusedAnswers(findings, answers)] };
  }
  const { chosen } = findings;
  if (chosen === null) return { kind: "ask", questions: askNumber(findings, elements, answers, mode) };
  const finding = findUnit(chosen, elements);
  const stated = asUnit(answers.energyUnit);
  refuseMixed(chosen, stated, mode);
  const unit = stated ?? (mode.confirmUnit ? null : finding.unit);
  if (mode.refuseOpen) refuseOpen(chosen, unit, answers.level);
  const questions: IntakeQuestion[] = [];
  if (unit === null) questions.push(askUnit(chosen, finding));
  if (answers.level === null) questions.push(askLevel(chosen, mode));
  if (unit === null || answers.level === null) return { kind: "ask", questions };
  return {
    kind: "column",
    candidate: chosen,
    unit,
    level: answers.level,
    messages: contradiction(chosen, finding.unit, stated),
  };
}

function asUnit(text: string | null): EnergyUnit | null {
  return ENERGY_UNITS.find((unit) => unit === text) ?? null;
}

function nameOf(candidate: EnergyCandidate): string {
  return candidate.key === null ? `number ${candidate.position} of the comment line` : `“${candidate.key}”`;
}

/**
 * Two units beside one number are no column. Where the unit stated is one of them, frames with another one stay without
 * energy; else nothing says which is meant.
 */
function refuseMixed(candidate: EnergyCandidate, stated: EnergyUnit | null, mode: DecisionMode): void {
  if (candidate.unitRows.size < 2 || (stated !== null && candidate.unitRows.has(stated))) return;
  if (stated === null && !mode.refuseOpen) return;
  const message = `Different units stand beside ${nameOf(candidate)}: ${unitsInWords(candidate)}. Write all energies in one unit, or state one of these in energyUnit: frames with another one then stay without energy.`;
  throw new DomainError("invalid", "The energies have different units", message, {
    faults: [{ field: "energyUnit", message }],
  });
}

function refuseOpen(candidate: EnergyCandidate, unit: EnergyUnit | null, level: string | null): void {
  const shown = candidate.first.find((text) => text !== null) ?? "";
  const what = `The ${placeWords(candidate.from)} hold an energy, ${nameOf(candidate)} (${shown} in the first frames)`;
  const faults: Fault[] = [];
  if (unit === null) {
    faults.push({
      field: "energyUnit",
      message: `${what}, and no unit stands beside it. State energyUnit: hartree, kcal/mol, kJ/mol or eV.`,
    });
  }
  if (level === null) {
    faults.push({
      field: "level",
      message: `${what}: name the level of theory in "level". If it is no energy, send energyFrom=none.`,
    });
  }
  if (faults.length === 0) return;
  const detail = faults.map((fault) => fault.message).join(" ");
  throw new DomainError("invalid", "The energies are not clear", detail, { faults });
}

/** What is named as the energy and is no number in any frame: told frame by frame, with what stands there. */
function unreadable({ unreadable, rows }: EnergyFindings): IntakeMessage[] {
  if (unreadable === null) return [];
  return [...unreadable.rows].map(([row, text]) => unreadableEnergy(rows[row]!, text));
}

/** What was said of energies although there are none. */
function statedWords({ level, energyUnit, energyKind, energyTemperature }: EnergyAnswers): string | null {
  if (level !== null) return `the level “${level}” was not made`;
  if (energyUnit !== null) return `no level was made, and the unit ${energyUnit} is not used`;
  if (energyKind !== "electronic") return `no level was made, and energyKind=${energyKind} is not used`;
  return energyTemperature === null ? null : "no level was made, and energyTemperature is not used";
}

/** The caller spoke of energies, and there are none. */
function unusedAnswers(findings: EnergyFindings, answers: EnergyAnswers): IntakeMessage[] {
  const stated = statedWords(answers);
  if (stated === null && findings.unreadable === null) return [];
  const what =
    findings.unreadable === null ? "hold no energy" : `hold no number as “${findings.unreadable.key}”`;
  const where = findings.rows.some((row) => row.textLine !== undefined) ? "data fields" : "comment lines";
  return [
    {
      code: "E10",
      severity: "remark",
      file: findings.rows[0]?.file ?? "",
      ...(findings.unreadable === null ? {} : { found: findings.unreadable.found }),
      message: `The ${where} ${what}, so ${stated ?? "no level was made"}.`,
      hint: "If one of their numbers is the energy, name it with energyFrom and read the files again.",
    },
  ];
}

function contradiction(
  candidate: EnergyCandidate,
  found: EnergyUnit | null,
  stated: EnergyUnit | null,
): IntakeMessage[] {
  if (found === null || stated === null || found === stated) return [];
  return [
    {
      code: "E06",
      severity: "remark",
      file: candidate.column.rows[0]?.file ?? "",
      message: `The files write ${found} beside ${nameOf(candidate)}, and ${stated} was stated: ${stated} was taken.`,
      hint: "If the files are right, read them again with their unit.",
    },
  ];
}

// --- questions ----------------------------------------------------------------------------------

function withNone(question: IntakeQuestion, text: string): IntakeQuestion {
  const none: QuestionOption = { id: NO_ENERGY, text, detail: "Takes the structures without energies." };
  return { ...question, options: [...question.options, none] };
}

function askNumber(
  findings: EnergyFindings,
  elements: ArrayLike<number>,
  answers: EnergyAnswers,
  mode: DecisionMode,
): IntakeQuestion[] {
  const number = energyFromQuestion(findings, elements);
  const likely = findings.proposed ?? findings.candidates[0];
  const questions = number === null ? [] : [withNone(number, "None of these")];
  if (answers.level !== null || likely === undefined) return questions;
  const level = askLevel(likely, mode);
  const named = new Set(findings.candidates.map(({ key }) => suggestLevel([key ?? ""])));
  // Names of two methods stand there: which one is meant hangs on the number that is chosen.
  named.delete(null);
  questions.push(named.size > 1 ? withoutProposal(level) : level);
  return questions;
}

function withoutProposal(question: IntakeQuestion): IntakeQuestion {
  return { ...question, options: question.options.map((option) => ({ ...option, proposed: false })) };
}

function askUnit(candidate: EnergyCandidate, finding: ReturnType<typeof findUnit>): IntakeQuestion {
  return withNone(energyUnitQuestion(candidate, finding), "No energy");
}

const MAX_LEVELS = 8;

function askLevel(candidate: EnergyCandidate, mode: DecisionMode): IntakeQuestion {
  const inFile = namedLevels(candidate, mode.comment);
  const names = [...new Set([...inFile, ...mode.knownLevels])].slice(0, MAX_LEVELS);
  return {
    id: "level",
    code: "level",
    text: "At which level of theory?",
    reason:
      "The energies get the name of their level, so that a second one can stand beside it. Any name will do.",
    options: names.map((name, at) => ({
      id: name,
      text: name,
      detail: inFile.includes(name) ? `Stands in the ${placeWords(candidate.from)}` : "In use in this team",
      proposed: at === 0 && inFile.length > 0,
    })),
  };
}

/** What names a method: the key or tag of the number itself, else the words of the comment line. */
function namedLevels({ from, key }: EnergyCandidate, comment: string): string[] {
  const own = suggestLevel([key ?? ""]);
  if (own !== null) return [own];
  if (!from.startsWith("field:")) return levelWords(comment, key);
  const named = suggestLevel([comment]);
  return named === null ? [] : [named];
}

/** Words of a comment line that look like the name of a method: `MMFF94`, `B3LYP/6-31G(d)`, `HF/def2-SVP`. */
function levelWords(comment: string, key: string | null): string[] {
  // A name before "=" is the key of another number and names that one's level.
  const text = comment.slice(0, 1000).replace(/[^\s,;="]+ ?=/g, " ");
  const words = text.split(/[\s,;=:"]+/);
  return words.filter((word) => {
    if (word === key || word.length < 2 || word.length > 40) return false;
    if (!/^[A-Z][A-Za-z0-9()*+,/ω-]*$/.test(word) || !/[A-Z]{2}/.test(word)) return false;
    return /\d|\//.test(word) && !/^[A-Z]\d+$/.test(word);
  });
}

import { turnOf } from "../averages/angle.ts";
import { initialRule, ruleAgainstUnit } from "../averages/rule.ts";
import { symbolOf } from "../chem/elements.ts";
import type { ColumnData } from "../column-data.ts";
import { looksLikeLevel } from "../columns-view.ts";
import { unitByAtoms } from "../intake/energy-unit-finding.ts";
import { IntakeRejection } from "../intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../intake/report.ts";
import { hasSteeringCharacters, quoteFound } from "../text/escape.ts";
import { type EnergyUnit, kcalPer } from "../units.ts";
import type { EnergyKind } from "../views.ts";
import { columnUnit, type KnownUnit, saysEnergy } from "./column-unit.ts";
import { type ColumnHeader, readAtom, readHeader } from "./header.ts";
import type { RawColumn } from "./raw-column.ts";

export const RULES = ["linear", "r-6", "r-3", "circular"] as const;
export type Rule = (typeof RULES)[number];

/** What somebody said of one column; what is left out stays as found. */
export interface ColumnChoice {
  /** From 1 in the table; the first column is the key. */
  column: number;
  /** False leaves the column out. */
  use?: boolean;
  name?: string;
  /** A text for a property, one of the energy units for an energy; "" for none. */
  unit?: string;
  kind?: "energy" | "property";
  rule?: Rule;
  /** Atom from 1, or null for a column that belongs to none. */
  atom?: number | null;
  quantity?: string;
}

/** What was said of all columns of a table at once. */
export interface ColumnAnswers {
  kind: "energy" | "property" | null;
  /** Name for the energies, where there is one column of them. */
  level: string | null;
  energyUnit: EnergyUnit | null;
  energyKind: EnergyKind | null;
  energyTemperature: number | null;
  rule: Rule | null;
  /** "plain": names such as C6 are no atoms. */
  perAtom: "bound" | "plain" | null;
  columns: ReadonlyMap<number, ColumnChoice>;
}

/** One column as it would be kept. */
export interface PlannedColumn {
  /** From 1 in the table. */
  column: number;
  header: string;
  name: string;
  kind: "energy" | "property";
  /** Null where there is none, or where an energy still needs one. */
  unit: string | null;
  /** What unit and kind were read from, in words. */
  why: string;
  rule: Rule | null;
  atom: number | null;
  quantity: string | null;
  /** A property without a unit that by name or size is probably an energy, and nobody has said which. */
  looksLikeEnergy: boolean;
  data: ColumnData;
  /** Frames with a value. */
  count: number;
  decimals: number;
}

export interface PlanContext {
  file: string;
  elements: ArrayLike<number>;
  /** Line of the header. */
  headerLine: number;
  /** Kinds of columns that are to be replaced, by name: what a column is stays, whatever its unit would say. */
  kinds?: ReadonlyMap<string, "energy" | "property">;
}

/** What a column is by its header and what was said of it, before its numbers are placed. */
export interface DraftColumn extends Omit<PlannedColumn, "data" | "count" | "decimals"> {
  raw: RawColumn;
  messages: IntakeMessage[];
  questions: IntakeQuestion[];
}

const MAX_NAME = 120;

/** What became of a name that is too long, or that steers a screen: it is kept and shown written out (row G13). */
function nameRemarks({ name }: DraftColumn, written: string, context: PlanContext): IntakeMessage[] {
  const remark = (code: string, message: string): IntakeMessage => ({
    ...{ code, severity: "remark", file: context.file, line: context.headerLine, message },
    found: quoteFound(written),
  });
  const length = [...written].length;
  return [
    ...(length > MAX_NAME
      ? [
          remark(
            "C05",
            `A name has ${length.toLocaleString("en-GB")} characters; a column has ${MAX_NAME} at most, and it is called by the first ${MAX_NAME}.`,
          ),
        ]
      : []),
    ...(hasSteeringCharacters(name)
      ? [
          remark(
            "G13",
            `The name "${quoteFound(name)}" holds control or text-direction characters; they are kept and shown written out.`,
          ),
        ]
      : []),
  ];
}

function cut(text: string): string {
  return [...text].slice(0, MAX_NAME).join("");
}

/** Headers without names get their place, equal ones a number behind (row C05). */
export function nameHeaders(
  written: readonly string[],
  file: string,
): { headers: string[]; messages: IntakeMessage[] } {
  const messages: IntakeMessage[] = [];
  const seen = new Set<string>();
  const remark = (message: string) =>
    messages.push({ code: "C05", severity: "remark", file, line: 1, message });
  const headers = written.map((text, k) => {
    let name = text.trim();
    if (name === "") {
      name = `column ${k + 1}`;
      if (k > 0) remark(`Column ${k + 1} has no name; it is called "${name}".`);
    }
    let own = name;
    for (let n = 2; seen.has(own); n++) own = withNumber(name, n);
    if (own !== name)
      remark(`The header "${quoteFound(name)}" stands twice; the second is called "${quoteFound(own)}".`);
    seen.add(own);
    return own;
  });
  return { headers, messages };
}

/** "E [kcal/mol]" becomes "E (2) [kcal/mol]": the unit stays at its place. */
function withNumber(header: string, n: number): string {
  const { name, unitText, stated } = readHeader(header);
  return stated ? `${name} (${n}) [${unitText}]` : `${header} (${n})`;
}

/** The unit of a column: what was said, the header, the cells. */
function unitOf(header: ColumnHeader, raw: RawColumn, choice: ColumnChoice | undefined) {
  if (choice?.unit !== undefined) {
    const text = choice.unit.trim();
    return { text: text === "" ? null : text, known: columnUnit(text), from: "said" as const };
  }
  if (header.unitText !== null) {
    const from = header.stated ? ("brackets" as const) : ("header" as const);
    const text = header.unitText === "" || header.unit?.unit === "" ? null : header.unitText;
    return { text, known: header.unit, from };
  }
  const [only] = raw.units.keys();
  if (only !== undefined && raw.units.size === 1 && raw.unitless === 0) {
    return { text: only, known: columnUnit(only), from: "cells" as const };
  }
  return { text: null, known: null as KnownUnit | null, from: "nothing" as const };
}

/** Cells that carry another unit than the column, or several: one of them is wrong, and nobody can say which. */
function checkCellUnits(
  name: string,
  unit: ReturnType<typeof unitOf>,
  raw: RawColumn,
  context: PlanContext,
): void {
  if (raw.units.size === 0 || unit.from === "cells" || unit.from === "said") return;
  const own = unit.known?.unit ?? unit.text;
  const other = [...raw.units.keys()].find((text) => (columnUnit(text)?.unit ?? text) !== own);
  if (other === undefined) return;
  const column =
    unit.text === null ? "others have none or another" : `its header says ${quoteFound(unit.text)}`;
  throw new IntakeRejection({
    code: "C06",
    file: context.file,
    found: quoteFound(other),
    message: `Cells of "${quoteFound(name)}" carry a unit, and ${column}.`,
    hint: "Write all values of a column in one unit, as name [unit].",
  });
}

const FROM_WORDS = {
  said: "as stated",
  brackets: "unit in the header",
  header: "unit read off the header",
  cells: "unit read off the cells",
  nothing: "no unit",
} as const;

/**
 * What one column is: name, kind, unit, rule, atom. Open points become questions: an energy without a unit, a unit that
 * is none of an energy's.
 *
 * @param lone it is the only column of the table without a unit: a stated energy unit can only mean it
 * @throws IntakeRejection C15 where its header names an atom that is not there, or another element
 */
export function draftColumn(
  column: number,
  header: string,
  raw: RawColumn,
  answers: ColumnAnswers,
  context: PlanContext,
  lone: boolean,
): DraftColumn {
  const choice = answers.columns.get(column);
  const read = readHeader(header);
  const unit = unitOf(read, raw, choice);
  checkCellUnits(header, unit, raw, context);
  const name = cut((choice?.name ?? read.name).trim() || `column ${column}`);
  const stated = choice?.kind ?? answers.kind ?? context.kinds?.get(name);
  const byUnit = saysEnergy(unit.known) || (unit.text === null && answers.energyUnit !== null && lone);
  const kind = stated ?? (byUnit ? "energy" : "property");
  const draft: DraftColumn = {
    column,
    header,
    name,
    kind,
    unit: null,
    why: FROM_WORDS[unit.from],
    rule: null,
    atom: null,
    quantity: null,
    looksLikeEnergy: false,
    raw,
    messages: [],
    questions: [],
  };
  draft.messages.push(...nameRemarks(draft, (choice?.name ?? read.name).trim(), context));
  if (unit.from === "header" || unit.from === "cells") {
    const place = unit.from === "cells" ? "cells" : "header";
    draft.messages.push({
      code: "C06",
      severity: "remark",
      file: context.file,
      line: context.headerLine,
      found: quoteFound(header),
      message: `The unit ${unit.text} of "${quoteFound(name)}" was read off its ${place}.`,
      hint: "Write name [unit] to state it.",
    });
  }
  if (kind === "energy") settleEnergy(draft, unit, answers, context);
  else settleProperty(draft, unit, answers, choice, context);
  if (stated === undefined && looksLikeEnergy(draft, context.elements)) {
    draft.looksLikeEnergy = true;
    draft.messages.push(likeEnergy(draft, context));
  }
  return draft;
}

/** The one letter that many write for an energy. */
const LETTERS = /^[EGH]$/i;

/** A whole property without a unit whose name speaks of energies, or whose numbers are near those of the free atoms. */
function looksLikeEnergy(draft: DraftColumn, elements: ArrayLike<number>): boolean {
  const { kind, unit, atom, name, raw } = draft;
  if (kind !== "property" || unit !== null || atom !== null) return false;
  if (LETTERS.test(name) || looksLikeLevel({ ...{ name, kind, unit, atom }, computed: false })) return true;
  const range = rangeOf(raw);
  return range !== null && unitByAtoms(range, elements) !== null;
}

function likeEnergy({ name, header, column }: DraftColumn, context: PlanContext): IntakeMessage {
  return {
    ...{ code: "C06", severity: "remark", file: context.file, line: context.headerLine, column },
    found: quoteFound(header),
    message: `"${quoteFound(name)}" looks like energies and names no unit; it is taken as a property.`,
    hint: `If it is a level, send kind=energy with energyUnit, or write its header as ${quoteFound(name)} [hartree], [kcal/mol], [kJ/mol] or [eV].`,
  };
}

function otherUnitStated(
  { header, name, unit }: DraftColumn,
  stated: EnergyUnit,
  from: "brackets" | "header" | "cells" | "nothing",
  context: PlanContext,
): IntakeMessage {
  return {
    code: "E06",
    severity: "remark",
    file: context.file,
    line: context.headerLine,
    found: quoteFound(header),
    message: `energyUnit=${stated} was not used for "${quoteFound(name)}": its ${from === "cells" ? "cells say" : "header says"} ${unit}, and ${unit} was taken.`,
    hint: `If the numbers are in ${stated}, write the header as ${quoteFound(name)} [${stated}] and send it again with replace=true.`,
  };
}

function settleEnergy(
  draft: DraftColumn,
  unit: ReturnType<typeof unitOf>,
  answers: ColumnAnswers,
  context: PlanContext,
): void {
  draft.unit = unit.known?.energy ?? (unit.text === null ? answers.energyUnit : null);
  if (draft.unit !== null) {
    if (unit.text === null) draft.why = "unit as stated";
    else if (answers.energyUnit !== null && answers.energyUnit !== draft.unit && unit.from !== "said")
      draft.messages.push(otherUnitStated(draft, answers.energyUnit, unit.from, context));
    return;
  }
  if (unit.text !== null) {
    const found = quoteFound(unit.text);
    draft.questions.push({
      id: "energyUnit",
      code: "energy-unit",
      text: `In which unit are the energies "${quoteFound(draft.name)}"?`,
      reason: `Its unit is ${found}, which is no unit of energy, and a unit that stands with the numbers counts before energyUnit. Write the header as ${quoteFound(draft.name)} [kcal/mol], [kJ/mol], [eV] or [hartree], or send columns=[{"column":${draft.column},"unit":"kcal/mol"}]. As a property in ${found} it is taken without kind=energy.`,
      options: [],
    });
    return;
  }
  const range = rangeOf(draft.raw);
  const proposed = range === null ? null : unitByAtoms(range, context.elements);
  const fits =
    proposed === null ? "" : ` The values come close to the sum of the isolated atoms in ${proposed}.`;
  const reason = `The header "${quoteFound(draft.header)}" names no unit.${fits}`;
  draft.questions.push({
    id: "energyUnit",
    code: "energy-unit",
    text: `In which unit is "${quoteFound(draft.name)}"?`,
    reason: `${reason} Where a header says name [unit], nothing is asked.`,
    options: UNITS_ASKED.map((id) => ({
      id,
      text: id,
      spreadKcal: range === null || draft.raw.count < 2 ? null : (range.max - range.min) * kcalPer(id),
      ...(id === proposed ? { proposed: true } : {}),
    })),
  });
}

const UNITS_ASKED = ["kcal/mol", "kJ/mol", "eV", "hartree"] as const;

/** Lowest and highest number of a column, as written; null without any. */
function rangeOf(raw: RawColumn): { min: number; max: number } | null {
  const { values, present } = raw;
  let [min, max] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (let k = 0; k < values.length; k++) {
    if (present[k] !== 1) continue;
    min = Math.min(min, values[k]!);
    max = Math.max(max, values[k]!);
  }
  return min <= max ? { min, max } : null;
}

function settleProperty(
  draft: DraftColumn,
  unit: ReturnType<typeof unitOf>,
  answers: ColumnAnswers,
  choice: ColumnChoice | undefined,
  context: PlanContext,
): void {
  draft.unit = unit.text === null ? null : [...unit.text].slice(0, 40).join("");
  draft.rule = choice?.rule ?? answers.rule ?? initialRule(draft.unit);
  checkRule(draft, choice?.rule !== undefined ? "columns" : "rule", context);
  if (draft.rule === "circular" && (choice?.rule ?? answers.rule) == null && neverTurns(draft)) {
    draft.messages.push({
      ...{ code: "C06", severity: "remark", file: context.file, line: context.headerLine },
      found: quoteFound(draft.header),
      message: `"${quoteFound(draft.name)}" is in ${draft.unit} and is averaged as a torsion is: all the way round, and a shape that stands for its mirror image too enters half with either sign.`,
      hint: "An angle between bonds keeps its sign: send rule=linear, or choose the linear rule at Averages.",
    });
  }
  if (unit.text !== null && unit.known === null) {
    draft.messages.push({
      code: "C06",
      severity: "remark",
      file: context.file,
      line: context.headerLine,
      found: quoteFound(unit.text),
      message: `The unit of "${quoteFound(draft.name)}" is not known; it is shown as written and takes part in no conversion.`,
    });
  }
  bindAtom(draft, unit.known, answers, choice, context);
}

/** Angles that all lie between 0 and half a turn may be bond angles as well as torsions. */
function neverTurns({ raw, unit }: DraftColumn): boolean {
  const range = rangeOf(raw);
  const half = (turnOf(unit) ?? 360) / 2;
  return range !== null && range.min >= 0 && range.max <= half;
}

/** Refuses a rule that the unit speaks against; says how the numbers of an angle without a unit are taken. */
function checkRule(draft: DraftColumn, field: string, context: PlanContext): void {
  const { rule, raw } = draft;
  if (rule === null) return;
  if (rule === "circular" && draft.unit === null) {
    const { values, present } = raw;
    const small = values.every((value, k) => present[k] !== 1 || Math.abs(value) <= 2 * Math.PI + 1e-6);
    draft.messages.push({
      code: "C06",
      severity: "remark",
      file: context.file,
      line: context.headerLine,
      found: quoteFound(draft.header),
      message: `"${quoteFound(draft.name)}" has no unit; it is averaged as an angle in degrees.${small ? " No value goes beyond 6.29: are they radians?" : ""}`,
      hint: "Write name [°], name [rad] or name [mrad] to state it.",
    });
  }
  const wrong = ruleAgainstUnit(rule, draft.unit);
  if (wrong === null) return;
  draft.questions.push({
    id: field,
    code: "rule",
    text: `Which rule averages "${quoteFound(draft.name)}"?`,
    reason: `${rule} averages ${wrong}; "${quoteFound(draft.header)}" is in ${draft.unit}. Where that unit is wrong, write the right one as name [unit].`,
    options: RULES.filter((id) => ruleAgainstUnit(id, draft.unit) === null).map((id) => ({
      id,
      text: id,
      proposed: id === "linear",
    })),
  });
}

function bindAtom(
  draft: DraftColumn,
  unit: KnownUnit | null,
  answers: ColumnAnswers,
  choice: ColumnChoice | undefined,
  context: PlanContext,
): void {
  const { elements, file, headerLine: line } = context;
  if (choice?.atom === null || (answers.perAtom === "plain" && choice?.atom === undefined)) return;
  const read = readAtom(readHeader(draft.header).name);
  const atom = choice?.atom ?? read?.atom;
  if (atom === undefined) return;
  const hint = "If such names mean no atoms, take them as plain columns (perAtom=plain).";
  const found = quoteFound(draft.header);
  if (atom < 1 || atom > elements.length) {
    const message = `The header names atom ${atom}; the molecule has ${elements.length}.`;
    throw new IntakeRejection({ code: "C15", file, line, found, message, hint });
  }
  const z = elements[atom - 1] ?? 0;
  if (choice?.atom === undefined && read?.element != null && read.element !== z) {
    const message = `The header names ${symbolOf(read.element)} as atom ${atom}, which is ${symbolOf(z)}${atom} here.`;
    throw new IntakeRejection({ code: "C15", file, line, atom, found, message, hint });
  }
  draft.atom = atom;
  draft.quantity = cut(
    choice?.quantity ?? read?.quantity ?? (unit?.family === "shift" ? "shift" : (draft.unit ?? "value")),
  );
}

import type { ColumnData } from "../column-data.ts";
import type { RawTable } from "../csv.server.ts";
import { COMMA_HINT, isCommaNumber } from "../intake/comma-energy.ts";
import type { EnergyColumn } from "../intake/energy-column.ts";
import { energyRemarks } from "../intake/energy-remarks.ts";
import { MessageList } from "../intake/message-list.ts";
import { isOutOfRange } from "../intake/numbers.ts";
import { IntakeRejection } from "../intake/reject.ts";
import type { IntakeMessage, IntakeQuestion } from "../intake/report.ts";
import { temperatureRemarks } from "../intake/settle-energies.ts";
import { quoteFound } from "../text/escape.ts";
import { ENERGY_UNITS } from "../units.ts";
import type { NumberStyle } from "./cells.ts";
import { DELIMITER_NAMES } from "./dialect.ts";
import { readHeader } from "./header.ts";
import { type FrameFacts, type KeyAnswers, type MatchedRows, matchRows } from "./match-rows.ts";
import {
  type ColumnAnswers,
  type DraftColumn,
  draftColumn,
  nameHeaders,
  type PlannedColumn,
} from "./plan-column.ts";

export interface TableFacts extends FrameFacts {
  elements: ArrayLike<number>;
  /** Kinds of the columns that the table may replace, by name. */
  kinds?: ReadonlyMap<string, "energy" | "property">;
}

export interface TableAnswers extends KeyAnswers, ColumnAnswers {
  style: NumberStyle | null;
  /** Whether the first row names the columns. */
  header: boolean | null;
}

/** A column that is not kept, and why. */
export interface LeftOut {
  column: number;
  header: string;
  why: string;
}

/** What a table would become: nothing is kept before its questions are answered. */
export interface TablePlan {
  columns: PlannedColumn[];
  leftOut: LeftOut[];
  match: MatchedRows;
  questions: IntakeQuestion[];
  messages: IntakeMessage[];
}

/** Columns of our own `export.csv` that belong to a sift and not to the frames. */
const OWN_EXPORT = "frame,label,relativeEnergy,degeneracy,symmetryNumber,copies,found,population";
const STYLE_WORDS: Record<NumberStyle, string> = {
  point: "Decimal point: 1234.5",
  comma: "Decimal comma: 1234,5",
  "point-thousands": "Commas between thousands: 1,234.5",
  "comma-thousands": "Points between thousands, decimal comma: 1.234,5",
};

/** How numbers are written, where commas or marks leave it open (rows C02 and C04). */
function askStyle(table: RawTable): IntakeQuestion | null {
  const counts = new Map<NumberStyle, number>();
  for (const { styled } of table.columns)
    for (const [style, n] of styled) counts.set(style, (counts.get(style) ?? 0) + n);
  const total = table.columns.reduce((sum, column) => sum + column.styledCount, 0);
  const example = table.columns.find(({ styledExample }) => styledExample !== null)?.styledExample;
  if (total === 0 || !example) return null;
  // The style that explains every cell; of several the one without marks. Decimal points elsewhere speak for points.
  const points = table.columns.some(({ decimals }) => decimals > 0);
  const order: NumberStyle[] = ["comma", "point-thousands", "comma-thousands"];
  const fits = order.filter(
    (style) => counts.get(style) === total && !(points && style !== "point-thousands"),
  );
  const only = counts.get("comma") === total && !counts.has("point-thousands") ? "C02" : "C04";
  return {
    id: "numbers",
    code: only,
    text: "How are numbers written?",
    reason: `Row ${example.row} has "${example.found}", and so ${total === 1 ? "one cell" : `${total} cells`} could be read in more than one way. Nothing is guessed.`,
    options: [...(fits.length > 0 ? fits : order), "point" as const].map((id, at) => ({
      id,
      text: STYLE_WORDS[id],
      detail: id === "point" ? `"${example.found}" then is text, and its value missing.` : undefined,
      proposed: at === 0 && fits.length > 0,
    })),
  };
}

function askHeader(table: RawTable): IntakeQuestion {
  return {
    id: "header",
    code: "C05",
    text: "Does the first row name the columns?",
    reason: `It reads ${(table.preview[0] ?? [])
      .slice(0, 5)
      .map((cell) => `"${cell}"`)
      .join(", ")}.`,
    options: [
      { id: "none", text: 'No, it is data: the columns are called "column 2" and so on', proposed: true },
      { id: "first", text: "Yes, these are names" },
    ],
  };
}

/** The numbers of a column by frame. */
function place(
  raw: DraftColumn["raw"],
  frames: Int32Array,
  frameCount: number,
): ColumnData & { count: number } {
  const data = { values: new Float64Array(frameCount), present: new Uint8Array(frameCount), count: 0 };
  const { values, present } = raw;
  for (let k = 0; k < frames.length; k++) {
    const frame = frames[k]!;
    if (frame === 0 || present[k] !== 1) continue;
    data.values[frame - 1] = values[k]!;
    data.present[frame - 1] = 1;
    data.count += 1;
  }
  return data;
}

function textMessages(draft: DraftColumn, file: string): IntakeMessage[] {
  const { texts, textCount } = draft.raw;
  const all = texts.map(
    ({ row, line, found }): IntakeMessage => ({
      code: "C14",
      severity: "remark",
      file,
      line,
      column: draft.column,
      found,
      message: `Row ${row} has ${isOutOfRange(found) ? "a number out of range" : "text"} in "${quoteFound(draft.name)}"; the value counts as missing.`,
      ...(isCommaNumber(found) ? { hint: COMMA_HINT } : isOutOfRange(found) ? { hint: RANGE_HINT } : {}),
    }),
  );
  const more = textCount - texts.length;
  if (more > 0) {
    const message = `${more.toLocaleString("en-GB")} more cells of "${quoteFound(draft.name)}" hold text, not listed.`;
    all.push({ code: "C14", severity: "remark", file, message });
  }
  return all;
}

const RANGE_HINT = "Numbers up to 1e50 are taken.";

function rowMessages(table: RawTable, match: MatchedRows): IntakeMessage[] {
  const { file } = table;
  const width = table.columns.length + 1;
  const held = table.ragged.map(
    ({ row, line, fields }): IntakeMessage => ({
      code: "C12",
      severity: "hold",
      file,
      line,
      message: `Row ${row} has ${fields} fields, the header has ${width}; the row was not taken.`,
      hint: "Nobody can say which value is missing: write empty cells for missing values.",
    }),
  );
  const unknown = match.unknown.map(({ row, line, found }): IntakeMessage => {
    const what = match.key === "frame" ? "no frame has this number" : "no frame has this label";
    const message =
      found === "" ? `Row ${row} has no key; it was not taken.` : `Row ${row}: ${what}; it was not taken.`;
    return { code: "C07", severity: "remark", file, line, ...(found === "" ? {} : { found }), message };
  });
  const missing = match.missing.map(
    (frame): IntakeMessage => ({
      code: "C07",
      severity: "remark",
      file,
      frame,
      message: "The table has no row for this frame; its values are missing.",
    }),
  );
  return [...held, ...unknown, ...missing];
}

/** Remarks on energies as on those of structure files, with the lines of the table. */
function energyMessages(
  planned: PlannedColumn,
  table: RawTable,
  match: MatchedRows,
  strip: string,
  answers: ColumnAnswers,
): IntakeMessage[] {
  const unit = ENERGY_UNITS.find((one) => one === planned.unit);
  if (unit === undefined) return [];
  const lineOf = new Map<number, number>();
  for (const [k, frame] of match.frames.entries()) lineOf.set(frame, table.lines[k]!);
  const kept = [...strip].flatMap((mark, k) => (mark === "h" ? [] : [k + 1]));
  const column: EnergyColumn = {
    from: planned.header,
    // The remarks count a comment line behind the count line; a table has one line a frame.
    rows: kept.map((frame) => ({ frame, file: table.file, line: (lineOf.get(frame) ?? 0) - 1 })),
    values: Float64Array.from(kept, (frame) => planned.data.values[frame - 1]!),
    present: Uint8Array.from(kept, (frame) => planned.data.present[frame - 1]!),
    count: planned.count,
    decimals: planned.decimals,
    problems: new Map(),
  };
  const rowless = new Set(match.missing);
  return energyRemarks(column, { unit, kindStated: answers.energyKind !== null })
    .filter(({ code, frame }) => code !== "E10" || !rowless.has(frame ?? 0))
    .map(({ line, ...message }) => ({
      ...message,
      ...(line === undefined || line < 1 ? {} : { line }),
      ...(message.code === "E10"
        ? { message: `The frame has no energy at "${quoteFound(planned.name)}".` }
        : {}),
      ...(message.code === "E13"
        ? {
            message: `The kind of the energy "${quoteFound(planned.name)}" is not stated; it is taken as electronic.`,
          }
        : {}),
    }));
}

/** One question for each field that can answer it. */
function merged(questions: readonly IntakeQuestion[]): IntakeQuestion[] {
  const byId = new Map<string, IntakeQuestion>();
  for (const question of questions) if (!byId.has(question.id)) byId.set(question.id, question);
  return [...byId.values()];
}

/** What its first text is and what to do, where a column that is left out has numbers but for their comma. */
function commaIn(table: RawTable, { column }: LeftOut): { found: string; hint: string } | undefined {
  const text = table.columns[column - 2]?.texts.find(({ found }) => isCommaNumber(found));
  return text && { found: text.found, hint: COMMA_HINT };
}

function nothingLeft(table: RawTable, leftOut: readonly LeftOut[]): IntakeRejection {
  const why = leftOut[0] === undefined ? "" : ` "${quoteFound(leftOut[0].header)}": ${leftOut[0].why}.`;
  const text = leftOut[0] && table.columns[leftOut[0].column - 2]?.texts[0];
  return new IntakeRejection({
    code: "C14",
    file: table.file,
    ...(text ? { line: text.line, found: text.found } : {}),
    message: `No column of the table holds numbers.${why}`,
    hint:
      text && isOutOfRange(text.found)
        ? RANGE_HINT
        : `Its cells are separated by a ${DELIMITER_NAMES[table.delimiter]}; is that right?`,
    ...(leftOut[0] && commaIn(table, leftOut[0])),
  });
}

/** The energies take the name that `level` gives, where they are one column. */
function nameByLevel(drafts: readonly DraftColumn[], answers: ColumnAnswers): IntakeQuestion[] {
  const energies = drafts.filter(
    ({ kind, column }) => kind === "energy" && !answers.columns.get(column)?.name,
  );
  const [only] = energies;
  if (answers.level === null || only === undefined) return [];
  if (energies.length === 1) {
    only.name = answers.level;
    return [];
  }
  return [
    {
      id: "level",
      code: "level",
      text: "Which column is this level?",
      reason: `The table has ${energies.length} columns of energies, and level names one. Leave it out: each header names its level.`,
      options: energies.map(({ name }) => ({ id: name, text: name })),
    },
  ];
}

/** "E [kcal/mol]" and "E [eV]" are two headers and one name: the second counts, as equal headers do. */
function nameApart(drafts: readonly DraftColumn[], file: string): IntakeMessage[] {
  const seen = new Set<string>();
  return drafts.flatMap((draft) => {
    const { name } = draft;
    for (let n = 2; seen.has(draft.name); n++) draft.name = `${[...name].slice(0, 112).join("")} (${n})`;
    seen.add(draft.name);
    if (draft.name === name) return [];
    const message = `Two columns are called "${quoteFound(name)}"; the second is called "${quoteFound(draft.name)}".`;
    return [{ code: "C05", severity: "remark" as const, file, line: 1, message }];
  });
}

/**
 * What a table becomes in an ensemble: columns with their numbers by frame, what is left out, what is open, and the
 * report. Rows C02 to C15 and E10 to E13 of the formats.
 *
 * @throws IntakeRejection where the table is refused as a whole (C07, C08, C14, C15)
 */
export function planTable(table: RawTable, facts: TableFacts, answers: TableAnswers): TablePlan {
  const { headers, messages: named } = nameHeaders(table.header, table.file);
  const context = { file: table.file, elements: facts.elements, headerLine: 1, kinds: facts.kinds };
  const match = matchRows(
    {
      file: table.file,
      header: table.header[0] ?? "",
      keys: table.keys,
      rowNumbers: table.rowNumbers,
      lines: table.lines,
    },
    facts,
    answers,
  );
  const own = headers.slice(0, 8).join(",") === OWN_EXPORT;
  const leftOut: LeftOut[] = [];
  const used = table.columns.flatMap((raw, k) => {
    const column = k + 2;
    const header = headers[k + 1] ?? `column ${column}`;
    const why = whyLeftOut(raw, header, own && k < 7, answers, column);
    if (why !== null) leftOut.push({ column, header, why });
    return why === null ? [{ column, header, raw }] : [];
  });
  const unitless = used.filter(({ header, raw }) => hasNoUnit(header, raw));
  const drafts = used.map(({ column, header, raw }) =>
    draftColumn(column, header, raw, answers, context, unitless.length === 1),
  );
  const list = new MessageList();
  list.addAll([...named, ...table.messages, ...match.messages, ...rowMessages(table, match)]);
  const questions = [...match.questions, ...nameByLevel(drafts, answers)];
  list.addAll(nameApart(drafts, table.file));
  const style = answers.style === null ? askStyle(table) : null;
  if (style) questions.unshift(style);
  if (!table.hasHeader && answers.header === null) questions.unshift(askHeader(table));
  for (const left of leftOut) {
    const { header, why } = left;
    if (why === CHOSEN) continue;
    const message = `"${quoteFound(header)}" was left out: ${why}.`;
    list.add({
      code: "C14",
      severity: "remark",
      file: table.file,
      line: 1,
      message,
      ...commaIn(table, left),
    });
  }
  const columns = drafts.map((draft): PlannedColumn => {
    const { raw, messages, questions: open, ...rest } = draft;
    list.addAll([...messages, ...textMessages(draft, table.file)]);
    questions.push(...open);
    const { count, ...data } = place(raw, match.frames, facts.strip.length);
    const planned = { ...rest, data, count, decimals: raw.decimals };
    if (planned.kind === "energy") list.addAll(energyMessages(planned, table, match, facts.strip, answers));
    return planned;
  });
  list.addAll(unusedAnswers(drafts, answers, table.file));
  if (columns.length === 0 && questions.length === 0 && !leftOut.some(({ why }) => why === CHOSEN))
    throw nothingLeft(table, leftOut);
  checkDistances(columns, table, match);
  return { columns, leftOut, match, questions: merged(questions), messages: list.messages() };
}

/** What was stated of energies and could not be used, or belongs to none; said, since numbers would be read otherwise. */
function unusedAnswers(
  drafts: readonly DraftColumn[],
  answers: ColumnAnswers,
  file: string,
): IntakeMessage[] {
  const { energyUnit, energyKind, energyTemperature, level } = answers;
  const remark = (code: string, message: string, hint: string): IntakeMessage => ({
    ...{ code, severity: "remark", file, line: 1, message, hint },
  });
  if (drafts.some(({ kind }) => kind === "energy")) {
    const again = "send the table again with replace=true";
    return temperatureRemarks({ energyKind: energyKind ?? "electronic", energyTemperature }, file, again);
  }
  const stated = Object.entries({ energyUnit, level, energyKind, energyTemperature })
    .filter(([, value]) => value !== null)
    .map(([name, value]) => `${name}=${quoteFound(String(value))}`);
  if (stated.length === 0 || drafts.length === 0) return [];
  const unitless = drafts.filter(({ unit }) => unit === null).map(({ name }) => `"${quoteFound(name)}"`);
  const why =
    answers.kind === "property"
      ? "kind=property makes properties of all columns"
      : unitless.length > 1 && energyUnit !== null
        ? `${unitless.slice(0, 5).join(", ")}${unitless.length > 5 ? " and more" : ""} have no unit, and nobody can tell which of them are energies`
        : "no column is an energy";
  const hint = "If they are energies, send kind=energy, or write their headers as name [unit].";
  return [
    remark(
      "E06",
      `${stated.join(", ")} ${stated.length === 1 ? "was" : "were"} not used: ${why}. All columns are properties.`,
      hint,
    ),
  ];
}

const CHOSEN = "not wanted";

function whyLeftOut(
  raw: DraftColumn["raw"],
  header: string,
  own: boolean,
  answers: ColumnAnswers,
  column: number,
): string | null {
  const choice = answers.columns.get(column);
  if (choice?.use === false) return CHOSEN;
  if (choice?.use === true) return raw.count > 0 || raw.styledCount > 0 ? null : "it holds no numbers";
  if (own) return "it belongs to the distinct set that it was exported from";
  if (raw.count > 0 || raw.styledCount > 0) return null;
  return header.startsWith("column ") ? "it is empty" : "it holds no numbers";
}

function hasNoUnit(header: string, raw: DraftColumn["raw"]): boolean {
  return readHeader(header).unitText === null && raw.units.size === 0;
}

/** A distance of 0 or less has no r^-6 (methods page, section 11): an input error, never a number. */
function checkDistances(columns: readonly PlannedColumn[], table: RawTable, match: MatchedRows): void {
  for (const { rule, data, name } of columns) {
    if (rule !== "r-6" && rule !== "r-3") continue;
    const at = data.values.findIndex((value, k) => data.present[k] === 1 && value <= 0);
    if (at < 0) continue;
    const row = match.frames.indexOf(at + 1);
    throw new IntakeRejection({
      code: "C14",
      file: table.file,
      frame: at + 1,
      ...(row < 0 ? {} : { line: table.lines[row]! }),
      found: String(data.values[at]),
      message: `"${quoteFound(name)}" is averaged as ${rule}, and a distance lies above 0.`,
      hint: "Correct the value, or average it linearly.",
    });
  }
}

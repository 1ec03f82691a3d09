import { initialRule } from "../averages/rule.ts";
import { inWords } from "../chem/chirality.ts";
import type { ColumnData } from "../column-data.ts";
import { quoteFound } from "../text/escape.ts";
import { COMMA_HINT, isCommaNumber } from "./comma-energy.ts";
import type { EnergyCandidate, EnergyFindings } from "./energies.ts";
import type { EnergyColumn } from "./energy-column.ts";
import { RESERVED_KEYS } from "./extended-comment.ts";
import type { IntakeMessage } from "./report.ts";
import type { NewColumn, SettledEnergies, SettleOptions } from "./settle-energies.ts";

/** Longest name of a column. */
const MAX_NAME = 120;
/** Keys that a message names; the rest is counted. */
const NAMED = 5;

/** What has its name already: the level, and where its numbers come from. */
export interface Taken {
  readonly level: string;
  readonly from: string;
}

/**
 * Further numbers of extended comments and data fields as columns under their own names, and remarks on what became
 * none: text, several numbers at once, keys beyond the limit, a name that the level has.
 */
export function propertyColumns(
  findings: Pick<EnergyFindings, "candidates" | "texts" | "beyond" | "rows" | "unreadable">,
  taken: Taken | null,
  options: SettleOptions,
): SettledEnergies {
  const own = findings.candidates.filter((candidate) => isProperty(candidate, taken, options.extended));
  const first = new Map(own.map((candidate, at) => [candidate, at]));
  const columns: NewColumn[] = [];
  const names = new Set(taken === null ? [] : [taken.level]);
  const renamed: string[] = [];
  for (const candidate of own) {
    const key = candidate.key ?? "";
    const name = freeName(key, names);
    if (name !== key) renamed.push(`“${quoteFound(key)}” is “${quoteFound(name)}”`);
    names.add(name);
    columns.push(toColumn(candidate, name, options.frames));
  }
  const order = (a: NewColumn, b: NewColumn) => (a.name < b.name ? -1 : 1);
  const file = findings.rows[0]?.file ?? "";
  const messages = [
    renamedRemark(renamed, file),
    ...textRemarks(findings, options.extended, file),
    beyondRemark(findings.beyond, options.extended, first.size, file),
  ].filter((message) => message !== null);
  return { columns: columns.sort(order), messages: [...messages, ...textCells(own, options)] };
}

function isProperty({ key, from }: EnergyCandidate, taken: Taken | null, extended: boolean): boolean {
  if (key === null || from === taken?.from || key.trim() === "" || key.length > MAX_NAME) return false;
  if (RESERVED_KEYS.has(key.toLowerCase())) return false;
  return extended || from.startsWith("field:");
}

/** No two columns of an ensemble share a name; a second one counts, as repeated headers of tables do (row C05). */
function freeName(key: string, names: ReadonlySet<string>): string {
  const plain = key.trim();
  let name = plain;
  for (let k = 2; names.has(name); k++) name = `${plain.slice(0, MAX_NAME - 6)} (${k})`;
  return name;
}

function toColumn(candidate: EnergyCandidate, name: string, frames: number): NewColumn {
  const unit = unitOf(candidate);
  return {
    name,
    kind: "property",
    energyKind: null,
    kindStated: false,
    temperature: null,
    unit,
    rule: initialRule(unit),
    origin: candidate.from,
    count: candidate.column.count,
    data: byFrame(candidate.column, frames),
  };
}

/** An energy unit beside the number, or what stands in brackets at the end of the name: `phi[deg]`. */
function unitOf({ key, unitRows, unitless }: EnergyCandidate): string | null {
  const [bound] = unitRows.keys();
  if (unitRows.size === 1 && unitless === 0) return bound ?? null;
  return /[[(]([^[\]()]{1,40})[\])]$/.exec(key ?? "")?.[1]?.trim() || null;
}

/** Frames that could not be read have no row in the scan, and no value. */
export function byFrame(column: EnergyColumn, frames: number): ColumnData {
  const data = { values: new Float64Array(frames), present: new Uint8Array(frames) };
  column.rows.forEach(({ frame }, row) => {
    data.values[frame - 1] = column.values[row]!;
    data.present[frame - 1] = column.present[row]!;
  });
  return data;
}

// --- remarks ------------------------------------------------------------------------------------

const remark = (code: string, rest: Omit<IntakeMessage, "code" | "severity">): IntakeMessage => ({
  code,
  severity: "remark",
  ...rest,
});

function listed(names: readonly string[], count: number): string {
  if (count <= NAMED) return inWords(names);
  return `${names.slice(0, NAMED).join(", ")} and ${(count - NAMED).toLocaleString("en-GB")} more`;
}

function renamedRemark(renamed: readonly string[], file: string): IntakeMessage | null {
  if (renamed.length === 0) return null;
  const message = `The name of a key is taken by another column: ${listed(renamed, renamed.length)}.`;
  return remark("C05", { file, message, hint: "A level of another name leaves the key its own." });
}

function textRemarks(
  { texts, unreadable }: Pick<EnergyFindings, "texts" | "unreadable">,
  extended: boolean,
  file: string,
): (IntakeMessage | null)[] {
  if (!extended) return [];
  // What should be the energy is told with its frames.
  const own = texts.filter(
    ({ key }) => key.trim() !== "" && key !== unreadable?.key && !RESERVED_KEYS.has(key.toLowerCase()),
  );
  const comma = own.filter(({ found }) => isCommaNumber(found));
  const text = own.filter((key) => !comma.includes(key));
  return [
    noColumn(text, "text or several numbers", file),
    noColumn(comma, "numbers with a comma", file, COMMA_HINT),
  ];
}

/** One remark on keys of which no column is made; null without any. */
function noColumn(
  keys: EnergyFindings["texts"],
  what: string,
  file: string,
  hint?: string,
): IntakeMessage | null {
  const [first] = keys;
  if (first === undefined) return null;
  const names = keys.slice(0, NAMED).map(({ key }) => `“${quoteFound(key)}”`);
  const verb = keys.length === 1 ? "holds" : "hold";
  return remark("C14", {
    file,
    found: quoteFound(first.found),
    message: `${listed(names, keys.length)} ${verb} ${what}: kept with the frames, no column is made of it.`,
    ...(hint === undefined ? {} : { hint }),
  });
}

function beyondRemark(
  { names, count }: EnergyFindings["beyond"],
  extended: boolean,
  made: number,
  file: string,
): IntakeMessage | null {
  if (count === 0 || !extended) return null;
  const left = listed(
    names.slice(0, NAMED).map((name) => `“${quoteFound(name)}”`),
    count,
  );
  return remark("G11", {
    file,
    message: `The limit of columns is met: ${made.toLocaleString("en-GB")} were made, and ${left} are left out.`,
    hint: "Their numbers stay with the frames; bring those that are needed as a table.",
  });
}

/** Text in a column of numbers: that value is missing, told in one message a frame. */
function textCells(own: readonly EnergyCandidate[], options: SettleOptions): IntakeMessage[] {
  const byRow = new Map<number, { words: string[]; comma: boolean }>();
  for (const { key, column } of own) {
    for (const [row, text] of column.problems) {
      if (!options.accepted(column.rows[row]!.frame)) continue;
      const told = byRow.get(row) ?? { words: [], comma: false };
      byRow.set(row, {
        words: [...told.words, `“${quoteFound(key ?? "")}” holds “${quoteFound(text)}”`],
        comma: told.comma || isCommaNumber(text),
      });
    }
  }
  const rows = own[0]?.column.rows ?? [];
  return [...byRow]
    .sort(([a], [b]) => a - b)
    .map(([row, { words, comma }]) => {
      const { frame, file, line } = rows[row]!;
      const message = `${listed(words, words.length)}, which is no number: the value is missing there.`;
      return remark("C14", {
        file,
        frame,
        line: line + 1,
        message,
        ...(comma ? { hint: COMMA_HINT } : {}),
      });
    });
}

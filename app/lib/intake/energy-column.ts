import { DomainError, type Fault } from "../errors.ts";
import { quoteFound } from "../text/escape.ts";
import { type CommentNumber, scanComment } from "./comment-numbers.ts";

/** Which number is the energy: `key:NAME`, `number:N`, or `field:NAME` of an SDF record. */
export type EnergyFrom = string;

/** What one frame says: a number, nothing, or text where a number should be. */
export type ExtractedEnergy = { text: string; value: number } | { problem: string } | null;

/**
 * The energy of one comment line by a rule that holds for all frames.
 *
 * @throws DomainError "invalid" on a rule of another form
 * @example extractEnergy("conf 7  energy: -12.3", "key:energy") // { text: "-12.3", value: -12.3 }
 */
export function extractEnergy(comment: string, from: EnergyFrom): ExtractedEnergy {
  const rule = parseFrom(from);
  const scanned = scanComment(comment);
  if (rule.kind === "field") return null;
  if (rule.kind === "number") {
    const number = scanned.numbers[rule.position - 1];
    return number ? asEnergy(number) : null;
  }
  const entry = scanned.keyed.get(rule.name);
  if (!entry) return null;
  return entry.number ? asEnergy(entry.number) : { problem: entry.text.slice(0, 200) };
}

function asEnergy({ text, value }: CommentNumber): ExtractedEnergy {
  return value === null ? { problem: text } : { text, value };
}

type Rule = { kind: "key" | "field"; name: string } | { kind: "number"; position: number };

/** @throws DomainError "invalid" on a rule of another form */
export function parseFrom(from: EnergyFrom): Rule {
  const colon = from.indexOf(":");
  const name = from.slice(colon + 1);
  switch (from.slice(0, Math.max(colon, 0))) {
    case "key":
      if (name !== "") return { kind: "key", name };
      break;
    case "field":
      if (name !== "") return { kind: "field", name };
      break;
    case "number":
      if (/^[1-9]\d{0,5}$/.test(name)) return { kind: "number", position: Number(name) };
      break;
  }
  throw new DomainError(
    "invalid",
    "This is no number of the file",
    `“${from.slice(0, 80)}” does not say which number is the energy. Write key:NAME, number:N or, for an SDF, field:NAME.`,
    { faults: [{ field: "energyFrom", message: "Write key:NAME, number:N or field:NAME." }] },
  );
}

/** Decimals of a number as written, its exponent counted in: "-1.2e-3" has 4. */
export function decimalsOf(text: string): number {
  const [mantissa = "", exponent] = text.toLowerCase().replace("d", "e").split("e");
  const point = mantissa.indexOf(".");
  const written = point < 0 ? 0 : mantissa.length - point - 1;
  return Math.max(0, written - Number(exponent ?? 0));
}

/** Where a frame stands, for messages. */
export interface EnergyRow {
  readonly frame: number;
  readonly file: string;
  readonly line: number;
  /** The line of its numbers, where that is not the one behind `line`: of an SDF record the counts line stands for all. */
  readonly textLine?: number;
}

/** The words of a comment line, or the data fields of a record: where a rule finds its number. */
export function placeWords(from: EnergyFrom): "comment lines" | "data fields" {
  return from.startsWith("field:") ? "data fields" : "comment lines";
}

/** Energies of frames by one rule, in their own unit as written. */
export interface EnergyColumn {
  readonly from: EnergyFrom;
  readonly rows: readonly EnergyRow[];
  /** One a row; 0 where `present` is 0. */
  readonly values: Float64Array;
  readonly present: Uint8Array;
  readonly count: number;
  /** Most decimals that any value is written with. */
  readonly decimals: number;
  /** Text that stands where the number should, by row index. */
  readonly problems: ReadonlyMap<number, string>;
}

/** Values of one column while the rows are still coming; rows without an entry are missing. */
export class EnergyValues {
  #values: number[] = [];
  #present: number[] = [];
  #problems = new Map<number, string>();
  #decimals = 0;

  /** @param row index from 0, never falling; a second value for a row replaces the first */
  set(row: number, energy: ExtractedEnergy): void {
    const found = energy !== null && "value" in energy;
    this.#pad(row + 1);
    this.#problems.delete(row);
    if (energy !== null && "problem" in energy) this.#problems.set(row, energy.problem);
    if (found) this.#decimals = Math.max(this.#decimals, decimalsOf(energy.text));
    this.#values[row] = found ? energy.value : 0;
    this.#present[row] = found ? 1 : 0;
  }

  /** `set` for a number whose decimals are known. */
  setNumber(row: number, value: number, decimals: number): void {
    this.#pad(row + 1);
    if (this.#problems.size > 0) this.#problems.delete(row);
    if (decimals > this.#decimals) this.#decimals = decimals;
    this.#values[row] = value;
    this.#present[row] = 1;
  }

  #pad(length: number): void {
    while (this.#values.length < length) {
      this.#values.push(0);
      this.#present.push(0);
    }
  }

  finish(from: EnergyFrom, rows: readonly EnergyRow[]): EnergyColumn {
    this.#pad(rows.length);
    const present = Uint8Array.from(this.#present);
    return {
      from,
      rows,
      values: Float64Array.from(this.#values),
      present,
      count: present.reduce((sum, flag) => sum + flag, 0),
      decimals: this.#decimals,
      problems: this.#problems,
    };
  }
}

/**
 * Energies out of stored comments, when the user has answered which number it is.
 *
 * @throws DomainError "invalid" where no comment holds the number
 * @example readEnergyColumn([{ frame: 1, file: "a.xyz", line: 1, comment: "E = -1.5" }], "key:E").values // [-1.5]
 */
export function readEnergyColumn(
  rows: Iterable<EnergyRow & { readonly comment: string }>,
  from: EnergyFrom,
): EnergyColumn {
  parseFrom(from);
  const values = new EnergyValues();
  const places: EnergyRow[] = [];
  for (const { comment, ...row } of rows) {
    values.set(places.length, extractEnergy(comment, from));
    places.push(row);
  }
  const column = values.finish(from, places);
  if (column.count === 0) throw absentEnergy(column);
  return column;
}

/** The error for a rule that fits no frame (422 in the API): with the first text that stands where its number should. */
export function absentEnergy(
  column: Omit<EnergyColumn, "values" | "present" | "count" | "decimals">,
): DomainError {
  const { from, rows, problems } = column;
  const rule = parseFrom(from);
  const what =
    rule.kind === "number"
      ? `number ${rule.position} of the comment line`
      : `${rule.kind === "field" ? "the data field " : ""}“${rule.name}”`;
  const none = `No frame has ${what} as a number.`;
  const [found] = problems;
  const row = found && rows[found[0]];
  if (!row) {
    return notFound(
      `${none} Check energyFrom: names of keys and data fields are exact in case, and every number of the comment line counts from 1.`,
      { message: none },
    );
  }
  const { frame, file } = row;
  const line = row.textLine ?? (rule.kind === "field" ? row.line : row.line + 1);
  const place = `${file}, ${rule.kind === "field" ? "record at line" : "line"} ${line}, frame ${frame}`;
  const message = `${none} Found “${quoteFound(found[1])}” (${place}).`;
  const hint = "Write one number there, with its unit at most, or name another number with energyFrom.";
  return notFound(`${message} ${hint}`, { file, frame, line, message });
}

function notFound(detail: string, fault: Omit<Fault, "field">): DomainError {
  return new DomainError("invalid", "The energy was not found", detail, {
    faults: [{ field: "energyFrom", ...fault }],
  });
}

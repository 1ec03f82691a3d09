import { quoteFound } from "../text/escape.ts";
import type { EnergyUnit } from "../units.ts";
import type { BareDecimal } from "./bare-decimal.ts";
import type { CommentNumber, ScannedComment } from "./comment-numbers.ts";
import type { EnergyCandidate } from "./energies.ts";
import { type EnergyColumn, type EnergyFrom, EnergyValues } from "./energy-column.ts";
import { boundUnit, classify, type NumberClass, saysRelative } from "./energy-words.ts";

/** Frames whose values are shown when the number is asked for. */
const SHOWN = 3;

/** What is gathered of one key or position while the frames pass. */
export class Track {
  readonly values = new EnergyValues();
  readonly classes = new Map<NumberClass, number>();
  /** Row indices by the unit bound to the number there. */
  readonly units = new Map<EnergyUnit, number[]>();
  readonly first: (string | null)[] = Array.from({ length: SHOWN }, () => null);
  position: number;
  seen = 0;
  relative = 0;
  customary = 0;
  /** Times that its key stood twice. */
  repeated = 0;

  constructor(position: number) {
    this.position = position;
  }

  /** A number that stands alone: what `put` makes of it, without looking. */
  putBare(row: number, number: BareDecimal): void {
    this.values.setNumber(row, number.value, number.decimals);
    this.position = 1;
    this.seen += 1;
    this.classes.set("loose", (this.classes.get("loose") ?? 0) + 1);
    if (row < SHOWN) this.first[row] = number.text;
  }

  put(row: number, number: CommentNumber, comment: ScannedComment, extended: boolean): void {
    const { text, value } = number;
    this.values.set(row, value === null ? { problem: text } : { text, value });
    // Where the key stands twice, its place is that of the frames where it stands once.
    if (number.repeated) this.repeated += 1;
    if (!number.repeated || this.position === 0) this.position = number.position;
    this.seen += 1;
    const kind = classify(number);
    this.classes.set(kind, (this.classes.get(kind) ?? 0) + 1);
    const unit = boundUnit(number, comment);
    if (unit !== null) this.#bind(unit, row);
    if (row < SHOWN) this.first[row] = text;
    if (saysRelative(number)) this.relative += 1;
    if (extended && (number.key === "energy" || number.key === "free_energy")) this.customary += 1;
  }

  /** Text where the number should be. */
  putText(row: number, text: string): void {
    this.values.set(row, { problem: text.slice(0, 200) });
    if (row < SHOWN) this.first[row] = quoteFound(text);
  }

  #bind(unit: EnergyUnit, row: number): void {
    const rows = this.units.get(unit);
    if (rows) rows.push(row);
    else this.units.set(unit, [row]);
  }
}

/** What a track came to, over the frames that take part. */
export function makeCandidate(
  from: EnergyFrom,
  key: string | null,
  track: Track,
  column: EnergyColumn,
  include: (frame: number) => boolean,
): EnergyCandidate {
  const chosen = column.rows.flatMap((row, k) => (include(row.frame) ? [k] : []));
  const values = chosen.filter((k) => column.present[k] === 1).map((k) => column.values[k]!);
  const wholeNumbers = column.decimals === 0;
  const unitRows = new Map<EnergyUnit, readonly number[]>();
  let bound = 0;
  for (const [unit, rows] of track.units) {
    const own = rows.filter((k) => column.present[k] === 1 && include(column.rows[k]!.frame));
    if (own.length > 0) unitRows.set(unit, own);
    bound += own.length;
  }
  return {
    from,
    key,
    position: track.position,
    class: classOf(track),
    relative: track.relative * 2 > track.seen,
    count: values.length,
    total: chosen.length,
    min: values.length === 0 ? Number.NaN : values.reduce((low, value) => Math.min(low, value)),
    max: values.length === 0 ? Number.NaN : values.reduce((high, value) => Math.max(high, value)),
    first: track.first.slice(0, Math.min(SHOWN, column.rows.length)),
    wholeNumbers,
    countsUp:
      wholeNumbers && values.length > 1 && values.every((v, k) => k === 0 || v === values[k - 1]! + 1),
    unitRows,
    unitless: values.length - bound,
    customary: track.customary * 2 > track.seen,
    column,
  };
}

/** The best class that holds in half the frames; whole numbers among decimals ("0" for the lowest) count with them. */
function classOf(track: Track): NumberClass {
  const count = (kind: NumberClass) => track.classes.get(kind) ?? 0;
  for (const kind of ["energy", "unit"] as const)
    if (count(kind) * 2 >= track.seen && count(kind) > 0) return kind;
  if (count("other") * 2 > track.seen) return "other";
  if (count("loose") > 0) return "loose";
  return count("whole") > 0 ? "whole" : "other";
}

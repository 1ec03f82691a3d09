import { quoteFound } from "../text/escape.ts";
import { type EnergyUnit, GAS_CONSTANT_J, kcalPer, kjPer, STANDARD_TEMPERATURE_K } from "../units.ts";
import type { EnergyColumn, EnergyRow } from "./energy-column.ts";
import { isOutOfRange, readNumber } from "./numbers.ts";
import type { IntakeMessage } from "./report.ts";

/** Spreads of one molecule's conformers outside of these bounds ask for a second look (methods page, section 1). */
export const NARROW_KCAL = 0.02;
export const WIDE_KCAL = 100;

/** A last written place above this many kJ/mol makes weights coarse (row E11). */
const COARSE_KJ = 0.1;

type Remark = Omit<IntakeMessage, "severity" | "code">;

export interface EnergyRemarkOptions {
  readonly unit: EnergyUnit;
  /** False where nobody said which kind of energy it is (row E13). */
  readonly kindStated: boolean;
  /** Frame numbers that take part, such as the accepted ones; default all. */
  readonly include?: (frame: number) => boolean;
}

/**
 * Remarks on a column of energies once its unit is settled: missing ones (E10), too few digits (E11), one far off,
 * all equal, a positive total energy (E12), kind not stated (E13). Those with a `frame` belong to it.
 *
 * @example energyRemarks(column, { unit: "hartree", kindStated: false }).map((message) => message.code)
 */
export function energyRemarks(column: EnergyColumn, options: EnergyRemarkOptions): IntakeMessage[] {
  const chosen = column.rows.flatMap((row, k) => ((options.include?.(row.frame) ?? true) ? [k] : []));
  const there = chosen.filter((k) => column.present[k] === 1);
  return [
    ...chosen.filter((k) => column.present[k] === 0).map((k) => missing(column, k)),
    ...coarse(column, options.unit),
    ...spread(column, there, options.unit),
    ...(options.kindStated || there.length === 0 ? [] : [kindOpen(column.rows[0]!)]),
  ];
}

function remark(code: string, rest: Remark): IntakeMessage {
  return { code, severity: "remark", ...rest };
}

const LATER = "It is accepted but gets no population; a value can be added later with a table.";

function missing(column: EnergyColumn, k: number): IntakeMessage {
  const row = column.rows[k]!;
  const text = column.problems.get(k);
  if (text !== undefined) return unreadableEnergy(row, text);
  const { frame, file, line, textLine } = row;
  return remark("E10", {
    file,
    frame,
    line: textLine ?? line + 1,
    message: "The frame has no energy.",
    hint: LATER,
  });
}

/** An energy that is written and is no number that can be stored: never a part of it (row E10). */
export function unreadableEnergy({ frame, file, line, textLine }: EnergyRow, text: string): IntakeMessage {
  const found = quoteFound(text);
  const place = { file, frame, line: textLine ?? line + 1, found };
  const { fault } = readNumber(text);
  if (isOutOfRange(text)) {
    const message = "The energy is a number out of range.";
    return remark("E10", { ...place, message, hint: `Numbers up to 1e50 are taken. ${LATER}` });
  }
  const message = "The energy is not a number.";
  if (fault !== "decimal-comma") return remark("E10", { ...place, message, hint: LATER });
  const hint = `Decimal comma or thousands? Write it with a point and nothing else, and take the file in again. ${LATER}`;
  return remark("E10", { ...place, message, hint });
}

/** Digits that a person reads: "2,600", "0.26", never an exponent. */
function plain(value: number): string {
  return value >= 100 ? Math.round(value).toLocaleString("en-GB") : String(Number(value.toPrecision(2)));
}

/** Beyond these a number tells no more than that something is wrong. */
const MOST_FACTOR = 1000;
const MOST_KCAL = 1e6;

function coarse(column: EnergyColumn, unit: EnergyUnit): IntakeMessage[] {
  const place = 10 ** -column.decimals * kjPer(unit);
  const row = column.rows[0];
  if (!row || column.count === 0 || place <= COARSE_KJ) return [];
  const share = Math.expm1((place * 1000) / (GAS_CONSTANT_J * STANDARD_TEMPERATURE_K));
  const decimals = column.decimals === 1 ? "1 decimal" : `${column.decimals || "No"} decimals`;
  const verb = column.decimals === 1 ? "is" : "are";
  return [
    remark("E11", {
      file: row.file,
      message: `${decimals} in ${unit} ${verb} ${plain(place)} kJ/mol: ${effect(share)} in a weight at 298 K.`,
      hint: "Have the energies written with more digits.",
    }),
  ];
}

function effect(share: number): string {
  if (share >= MOST_FACTOR) return `more than a factor of ${MOST_FACTOR.toLocaleString("en-GB")}`;
  return share > 1 ? `a factor of ${plain(1 + share)}` : `about ${Math.round(share * 100)} %`;
}

/** "1,234 kcal/mol"; what is absurd is not spelt out. */
export function kcalWords(kcal: number): string {
  return kcal > MOST_KCAL ? "more than a million kcal/mol" : `${plain(kcal)} kcal/mol`;
}

function spread(column: EnergyColumn, there: readonly number[], unit: EnergyUnit): IntakeMessage[] {
  const first = there[0];
  if (first === undefined || there.length < 2) return positive(column, there, unit);
  const { file } = column.rows[first]!;
  const sorted = Float64Array.from(there, (k) => column.values[k]!).sort();
  const low = sorted[0]!;
  const kcal = (sorted[sorted.length - 1]! - low) * kcalPer(unit);
  const remarks: IntakeMessage[] = positive(column, there, unit);
  if (kcal === 0) {
    const message = `All ${there.length} energies are equal.`;
    remarks.push(
      remark("E12", { file, message, hint: "Is this the number that changes between conformers?" }),
    );
  } else if (kcal < NARROW_KCAL) {
    const message = `The energies span ${spanWords(kcal)}, less than conformers of one molecule do.`;
    remarks.push(remark("E12", { file, message, hint: narrowHint(kcal / kcalPer(unit), unit) }));
  }
  if (kcal > WIDE_KCAL) remarks.push(...wide(column, there, sorted, unit, kcal));
  return remarks;
}

/** A span below 0.02 kcal/mol. */
function spanWords(kcal: number): string {
  return kcal < 1e-6
    ? "less than 0.000001 kcal/mol"
    : `${Number(kcal.toPrecision(2)).toFixed(6).replace(/0+$/, "")} kcal/mol`;
}

/** What the same numbers would span in a larger unit, where that is what conformers show. */
function narrowHint(span: number, unit: EnergyUnit): string {
  const larger = (["hartree", "eV", "kcal/mol", "kJ/mol"] as const).filter(
    (other) => kcalPer(other) > kcalPer(unit),
  );
  const fitting = larger.find((other) => {
    const kcal = span * kcalPer(other);
    return kcal >= NARROW_KCAL && kcal <= WIDE_KCAL;
  });
  if (fitting === undefined) return "Is the unit right, and are these different conformers?";
  return `Is the unit right? Read as ${fitting} they would span ${plain(span * kcalPer(fitting))} kcal/mol.`;
}

/**
 * Which of the values lie farther than 100 kcal/mol from the median of others that lie together: one, or a few (one in
 * twenty at most). Empty where the whole is too wide, or nothing is.
 *
 * @returns places in `values`
 * @example farOff([0, 1, 2, -500], "kcal/mol") // [3]
 */
export function farOff(values: readonly number[], unit: EnergyUnit): number[] {
  const median = Float64Array.from(values).sort()[values.length >> 1] ?? 0;
  const isFar = (value: number) => Math.abs(value - median) * kcalPer(unit) > WIDE_KCAL;
  const off = values.flatMap((value, place) => (isFar(value) ? [place] : []));
  const rest = values.filter((value) => !isFar(value));
  // Of two or three nobody can say which one is off.
  const few = values.length >= 4 && off.length <= Math.max(1, values.length / 20);
  return few && (maximum(rest) - minimum(rest)) * kcalPer(unit) <= WIDE_KCAL ? off : [];
}

/** Frames that are far off, each by itself; else the whole is too wide. */
function wide(
  column: EnergyColumn,
  there: readonly number[],
  sorted: Float64Array,
  unit: EnergyUnit,
  kcal: number,
): IntakeMessage[] {
  const median = sorted[sorted.length >> 1]!;
  const off = farOff(
    there.map((k) => column.values[k]!),
    unit,
  );
  if (off.length === 0) {
    const message = `The energies span ${kcalWords(kcal)}, more than conformers of one molecule do.`;
    const hint = "Is the unit right, and are all frames the same molecule?";
    return [remark("E12", { file: column.rows[there[0]!]!.file, message, hint })];
  }
  return off.map((place) => {
    const k = there[place]!;
    const { frame, file, line, textLine } = column.rows[k]!;
    const away = kcalWords(Math.abs(column.values[k]! - median) * kcalPer(unit));
    const message = `The energy lies ${away} from the middle of the others.`;
    return remark("E12", {
      file,
      frame,
      line: textLine ?? line + 1,
      message,
      hint: "Did the calculation fail? Hold the frame if so.",
    });
  });
}

const minimum = (values: readonly number[]) => values.reduce((low, value) => Math.min(low, value));
const maximum = (values: readonly number[]) => values.reduce((high, value) => Math.max(high, value));

/** Total energies are negative; relative ones begin at 0, and those of force fields are not given in hartree. */
function positive(column: EnergyColumn, there: readonly number[], unit: EnergyUnit): IntakeMessage[] {
  if (unit !== "hartree" || there.some((k) => column.values[k]! <= 0)) return [];
  const row = there[0] === undefined ? undefined : column.rows[there[0]];
  if (!row) return [];
  const message = "All energies are positive; total energies in hartree are negative.";
  return [remark("E12", { file: row.file, message, hint: "Is the unit right, or are they relative?" })];
}

function kindOpen(row: EnergyRow): IntakeMessage {
  return remark("E13", {
    file: row.file,
    message: "The kind of energy is not stated; it is taken as electronic.",
    hint: "Say if it holds zero-point, enthalpy or free-energy terms.",
  });
}

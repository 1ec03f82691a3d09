import { numberLength, parseQuantity, plainBlanksAndMinus } from "../intake/numbers.ts";

/**
 * How numbers are written: with a decimal point or comma, with or without a mark between thousands. `auto` reads
 * plain numbers only and says of others what they look like.
 */
export const NUMBER_STYLES = ["point", "comma", "point-thousands", "comma-thousands"] as const;
export type NumberStyle = (typeof NUMBER_STYLES)[number];

export type CellReading =
  | { kind: "missing" }
  /** `unit` stands behind the number in the cell (row C06). */
  | { kind: "number"; value: number; unit: string | null; decimals: number }
  /** A number by another style than the one read with; `looks` are the styles that it fits. */
  | { kind: "styled"; looks: readonly NumberStyle[] }
  | { kind: "text" };

const MISSING = new Set(["", "na", "n/a", "nan", "null", "-", "."]);
const MISSING_CELL: CellReading = { kind: "missing" };
const TEXT_CELL: CellReading = { kind: "text" };

/** Words that stand for a value that is not there (row C10). */
export function isMissing(cell: string): boolean {
  return cell.length <= 12 && MISSING.has(cell.trim().toLowerCase());
}

/** What may stand behind the number in one cell: "12.3 %", "4.5 ppm". */
const UNIT_BEHIND = /^\s*([%°‰]|[A-Za-zÅµ°][A-Za-zÅµ°/0-9^.*· -]{0,19})$/;

/** No number with its unit is longer; the patterns below would look at a longer text too often. */
const MOST_CHARACTERS = 200;

/**
 * Reads one cell of a numeric column.
 *
 * @param style null where nobody said how numbers are written
 * @example readCell("0,435", null) // { kind: "styled", looks: ["comma"] }
 * @example readCell("0,435", "comma") // { kind: "number", value: 0.435, ... }
 */
export function readCell(written: string, style: NumberStyle | null): CellReading {
  // Our own exports, and spreadsheets, put a ' before what could be run as a formula (row C13).
  const text = plainBlanksAndMinus(written)
    .trim()
    .replace(/^'(?=[=+\-@])/, "");
  if (isMissing(text)) return MISSING_CELL;
  if (text.length > MOST_CHARACTERS) return TEXT_CELL;
  const plain = style === null || style === "point" ? text : asPlain(text, style);
  if (plain !== null) {
    const value = parseQuantity(plain);
    if (value !== null) return { kind: "number", value, unit: null, decimals: decimals(plain) };
    const bound = withUnit(plain);
    if (bound !== null) return bound;
  }
  if (style !== null) return TEXT_CELL;
  const looks = stylesOf(text);
  return looks.length === 0 ? TEXT_CELL : { kind: "styled", looks };
}

function decimals(text: string): number {
  const point = text.indexOf(".");
  if (point < 0) return 0;
  let at = point + 1;
  while (text.charCodeAt(at) >= 48 && text.charCodeAt(at) <= 57) at += 1;
  const exponent = /[eEdD]([+-]?\d+)$/.exec(text)?.[1];
  return Math.max(0, at - point - 1 - Number(exponent ?? 0));
}

function withUnit(text: string): CellReading | null {
  const length = numberLength(text, 0);
  if (length === 0 || length === text.length) return null;
  const unit = UNIT_BEHIND.exec(text.slice(length))?.[1];
  const value = parseQuantity(text.slice(0, length));
  // "5x" is text; a unit is set apart, or is a sign of its own.
  if (unit === undefined || value === null) return null;
  if (!/^[\s%°‰]/.test(text.slice(length))) return null;
  return { kind: "number", value, unit: unit.trim(), decimals: decimals(text.slice(0, length)) };
}

// Marks between thousands: no number so written begins with 0.
const GROUPS_BY_COMMA = /^[+-]?[1-9]\d{0,2}(?:,\d{3})+(?:\.\d*)?(?:[eE][+-]?\d+)?$/;
const GROUPS_BY_POINT = /^[+-]?[1-9]\d{0,2}(?:\.\d{3})+(?:,\d*)?(?:[eE][+-]?\d+)?$/;
const GROUPS_BY_BLANK = /^[+-]?[1-9]\d{0,2}(?: \d{3})+(?:[.,]\d*)?$/;
const DECIMAL_COMMA = /^[+-]?(?:\d+,\d*|,\d+)(?:[eEdD][+-]?\d+)?$/;

/** The number with a decimal point and no marks, by the style stated; null where it is not written so. */
function asPlain(text: string, style: NumberStyle): string | null {
  const number = text.replace(/\s*[%°‰A-Za-zÅµ].*$/, "");
  const rest = /[eEdD][+-]?\d+$/.test(text) ? "" : text.slice(number.length);
  const body = rest === "" ? text : number;
  if (style === "comma") return body.includes(".") ? null : body.replace(",", ".") + rest;
  const grouped = style === "point-thousands" ? GROUPS_BY_COMMA : GROUPS_BY_POINT;
  const [mark, point] = style === "point-thousands" ? [",", "."] : [".", ","];
  if (GROUPS_BY_BLANK.test(body)) return body.replaceAll(" ", "").replace(point, ".") + rest;
  if (body.includes(mark) && !grouped.test(body)) return null;
  return body.replaceAll(mark, "").replace(point, ".") + rest;
}

/** What a cell that is no plain number may be (rows C02 and C04). */
function stylesOf(text: string): NumberStyle[] {
  const looks: NumberStyle[] = [];
  const body = text.replace(/\s*[%°‰]$/, "");
  if (DECIMAL_COMMA.test(body)) looks.push("comma", "comma-thousands");
  if (GROUPS_BY_COMMA.test(body)) looks.push("point-thousands");
  // "1.234" alone is a plain number; two points, or a comma behind, make it one with marks.
  if (GROUPS_BY_POINT.test(body)) looks.push("comma-thousands");
  if (GROUPS_BY_BLANK.test(body)) looks.push(body.includes(",") ? "comma-thousands" : "point-thousands");
  return looks;
}

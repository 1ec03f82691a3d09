/**
 * Numbers as files write them. A number is one only as a whole token,
 * `[+-]?(digits[.digits*] | .digits)([eEdD][+-]?digits)?`; never a part of one, never NaN or infinity.
 */

/** 10^0 .. 10^22, all of them exact doubles: one multiplication or division by them rounds once. */
export const POWERS_OF_TEN = Float64Array.from({ length: 23 }, (_, k) => Number(`1e${k}`));

/** Veltkamp's constant 2^27 + 1: splits a double into two halves whose products are exact. */
const SPLITTER = 134217729;

/**
 * (high 10^lowDigits + low) / 10^decimals, rounded once, for digits that no longer fit into one exact double: quotient
 * and remainder in doubled precision, accepted only if the remainder's own error cannot tip the rounding.
 *
 * Dekker, Numer. Math. 1971, 18, 224 (exact product and doubled-length division; citation from memory).
 *
 * @param high whole, below 2^31; `low` whole, below 10^lowDigits; lowDigits at most 9, decimals at most 22
 * @returns NaN where the rounding stays open: halfway between two doubles, or nearer to that than can be told
 * @example decimalQuotient(123456789, 12345678, 8, 16) // 1.2345678912345678
 */
export function decimalQuotient(high: number, low: number, lowDigits: number, decimals: number): number {
  const shift = POWERS_OF_TEN[lowDigits]!;
  const upper = (high >>> 16) * shift * 65536;
  const lower = (high & 65535) * shift + low;
  const whole = upper + lower;
  const rest = lower - (whole - upper);
  const power = POWERS_OF_TEN[decimals]!;
  const quotient = whole / power;
  const product = quotient * power;
  const a = SPLITTER * quotient;
  const aHigh = a - (a - quotient);
  const aLow = quotient - aHigh;
  const b = SPLITTER * power;
  const bHigh = b - (b - power);
  const bLow = power - bHigh;
  const productError = aHigh * bHigh - product + aHigh * bLow + aLow * bHigh + aLow * bLow;
  const correction = (whole - product - productError + rest) / power;
  const doubt = quotient * 2 ** -96;
  const value = quotient + (correction - doubt);
  return value === quotient + (correction + doubt) ? value : Number.NaN;
}

const isDigit = (code: number) => code >= 48 && code <= 57;

function skipDigits(text: string, from: number): number {
  let k = from;
  while (isDigit(text.charCodeAt(k))) k += 1;
  return k;
}

/**
 * Length of the number at `from`, by the grammar above; 0 where none begins. The longest one: "5x" has length 1, so
 * that callers who want a whole token compare with its end.
 *
 * @example numberLength("-1.5e-3 kcal", 0) // 7
 */
export function numberLength(text: string, from: number): number {
  let k = from;
  const sign = text.charCodeAt(k);
  if (sign === 43 || sign === 45) k += 1;
  const whole = skipDigits(text, k);
  let end = whole;
  if (text.charCodeAt(whole) === 46) end = skipDigits(text, whole + 1);
  const digits = end - k - (end > whole ? 1 : 0);
  if (digits === 0) return 0;
  const mark = text.charCodeAt(end) | 32;
  if (mark === 101 || mark === 100) {
    let exponent = end + 1;
    const expSign = text.charCodeAt(exponent);
    if (expSign === 43 || expSign === 45) exponent += 1;
    const last = skipDigits(text, exponent);
    if (last > exponent) end = last;
  }
  return end - from;
}

/**
 * No quantity of a molecule is larger: numbers beyond are out of range, so that nothing computed from two of them (a
 * unit's factor, a difference, a product of squares, a sixth power) can overflow. Our own choice.
 */
export const LARGEST_NUMBER = 1e50;

/**
 * The double of a whole token, exactly as `Number` rounds it; null where the token is no number or overflows.
 *
 * @example parseNumber("1.5D-3") // 0.0015
 * @example parseNumber("1,234") // null
 */
export function parseNumber(token: string): number | null {
  const length = numberLength(token, 0);
  if (length === 0 || length !== token.length) return null;
  let value = Number(token);
  if (Number.isNaN(value)) value = Number(token.replace(/[dD]/, "e"));
  return Number.isFinite(value) ? value : null;
}

/**
 * `parseNumber` of an energy or a property: null beyond `LARGEST_NUMBER` too.
 *
 * @example parseQuantity("1e51") // null
 */
export function parseQuantity(token: string): number | null {
  const value = parseNumber(token);
  return value === null || Math.abs(value) > LARGEST_NUMBER ? null : value;
}

/** True for the digits of a number that no quantity is: beyond `LARGEST_NUMBER`, or more than a double holds. */
export function isOutOfRange(text: string): boolean {
  if (!/\d/.test(text)) return false;
  const { value, fault } = readNumber(text);
  return value === null ? fault === "not-finite" : Math.abs(value) > LARGEST_NUMBER;
}

/**
 * Characters that stand for the ASCII minus and blank in numbers (row G14), replaced one for one, so that columns
 * stay where they are.
 */
export function plainBlanksAndMinus(text: string): string {
  if (isAscii(text)) return text;
  return text.replace(/[\u00a0\u2000-\u200a\u202f\u205f]/g, " ").replace(/\u2212/g, "-");
}

function isAscii(text: string): boolean {
  for (let k = 0; k < text.length; k++) if (text.charCodeAt(k) > 127) return false;
  return true;
}

/** Why a token that stands where a number should is none. */
export type NumberFault =
  | "decimal-comma"
  | "run-together"
  | "lost-exponent"
  | "not-finite"
  | "foreign-digit"
  | "not-a-number";

export type NumberReading =
  /** `caret` is true for exponents written `*^` (row X23). */
  { value: number; caret: boolean; fault: null } | { value: null; caret: false; fault: NumberFault };

/**
 * Reads a coordinate's token, or says what is wrong with it.
 *
 * @example readNumber("-10.12345-11.33").fault // "run-together"
 * @example readNumber("1.2*^-6") // { value: 0.0000012, caret: true, fault: null }
 */
export function readNumber(token: string): NumberReading {
  const value = parseNumber(token);
  if (value !== null) return { value, caret: false, fault: null };
  const caret = parseCaret(token);
  if (caret !== null) return { value: caret, caret: true, fault: null };
  return { value: null, caret: false, fault: faultOf(token) };
}

function parseCaret(token: string): number | null {
  const at = token.indexOf("*^");
  if (at <= 0) return null;
  const mantissa = token.slice(0, at);
  if (numberLength(mantissa, 0) !== at || /[eEdD]/.test(mantissa)) return null;
  return parseNumber(`${mantissa}e${token.slice(at + 2)}`);
}

function faultOf(token: string): NumberFault {
  if (/^[+-]?(?:nan|inf|infinity)$/i.test(token) || /^\*+$/.test(token)) return "not-finite";
  if (numberLength(token, 0) === token.length) return "not-finite";
  if (isDecimalComma(token)) return "decimal-comma";
  for (const character of token) {
    if (character.charCodeAt(0) > 127 && /\p{Nd}/u.test(character)) return "foreign-digit";
  }
  const first = numberLength(token, 0);
  if (first > 0 && first < token.length) {
    const second = numberLength(token, first);
    const points = token.split(".").length - 1;
    if (second > 0 && points >= 2) return "run-together";
    const next = token[first];
    if (second > 0 && (next === "-" || next === "+")) return "lost-exponent";
  }
  return "not-a-number";
}

/** `0,123`, `-1,5`, `1.234,5`: digits with one comma, after which digits end the token. */
function isDecimalComma(written: string): boolean {
  // In "0,1, 0,2" the last comma separates.
  const token = written.endsWith(",") ? written.slice(0, -1) : written;
  const at = token.indexOf(",");
  if (at < 0 || at !== token.lastIndexOf(",") || at === token.length - 1) return false;
  const whole = token.slice(0, at).replace(/^[+-]/, "");
  if (whole !== "" && skipDigits(whole.replaceAll(".", ""), 0) !== whole.replaceAll(".", "").length)
    return false;
  const digits = skipDigits(token, at + 1);
  return digits > at + 1 && (digits === token.length || /^[eEdD][+-]?\d+$/.test(token.slice(digits)));
}

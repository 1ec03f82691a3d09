import { parseQuantity } from "./numbers.ts";

/** Value of a key in an extended comment: numbers and logicals typed, arrays nested at most twice (row X32). */
export type ExtendedValue = number | boolean | string | readonly ExtendedValue[];

/** A value with the characters it was written as, quotes and brackets left off. */
export interface ExtendedEntry {
  readonly text: string;
  readonly value: ExtendedValue;
}

/** What of a comment is unusual but readable (row X33). */
export type CommentOddity = "bare-key" | "single-quotes" | "key-twice";

export interface ExtendedComment {
  readonly keys: ReadonlyMap<string, ExtendedEntry>;
  /** The first key of each oddity. */
  readonly oddities: ReadonlyMap<CommentOddity, string>;
  /** The first key that is given a value twice: in plain text too, where a word may well stand twice. */
  readonly assignedTwice: string | null;
}

/** Column (from 1) and reason where a comment does not parse. */
export interface CommentFault {
  readonly column: number;
  readonly reason: string;
}

const isBlank = (code: number) => code === 32 || code === 9 || code === 11 || code === 12;

/**
 * Reads `key=value` pairs as the extended XYZ specification writes them: bare and quoted strings with `\"`, `\\`, `\n`,
 * arrays `[1,2]` and `[[..],[..]]`, the older `{1 2}` and `"1 2 3"`, blanks round `=`. A Map, so that a key called
 * `__proto__` is a key like any other.
 *
 * @returns a fault where a quote or bracket stays open or a `=` has no key or value
 * @example parseExtendedComment('energy=-1.5 name="conf 1"') // keys: energy -> -1.5, name -> "conf 1"
 */
export function parseExtendedComment(comment: string): ExtendedComment | { fault: CommentFault } {
  const keys = new Map<string, ExtendedEntry>();
  const oddities = new Map<CommentOddity, string>();
  let assignedTwice: string | null = null;
  const note = (oddity: CommentOddity, key: string) => {
    if (!oddities.has(oddity)) oddities.set(oddity, key);
  };
  let at = skipBlanks(comment, 0);
  while (at < comment.length) {
    const key = readPiece(comment, at, "=");
    if ("fault" in key) return key;
    if (key.text === "" && key.style === "bare") return faultAt(at, "a “=” stands without a key");
    const sign = skipBlanks(comment, key.end);
    let entry: ExtendedEntry = { text: "", value: true };
    at = sign;
    if (comment[sign] === "=") {
      const from = skipBlanks(comment, sign + 1);
      if (from >= comment.length) return faultAt(sign, `the key “${key.text}” has no value`);
      const value = readPiece(comment, from, "");
      if ("fault" in value) return value;
      if (value.style === "single") note("single-quotes", key.text);
      entry = { text: value.text, value: typed(value) };
      at = skipBlanks(comment, value.end);
    } else note("bare-key", key.text);
    const before = keys.get(key.text);
    if (before) note("key-twice", key.text);
    if (before && hasValue(before) && hasValue(entry)) assignedTwice ??= key.text;
    keys.set(key.text, entry);
  }
  return { keys, oddities, assignedTwice };
}

/** Whether a key stands with a value, not as a bare word. */
export function hasValue({ text, value }: ExtendedEntry): boolean {
  return text !== "" || value !== true;
}

type Style = "bare" | "quoted" | "single" | "square" | "curly";

interface Piece {
  readonly text: string;
  readonly style: Style;
  readonly end: number;
}

function faultAt(index: number, reason: string): { fault: CommentFault } {
  return { fault: { column: index + 1, reason } };
}

function skipBlanks(text: string, from: number): number {
  let k = from;
  while (k < text.length && isBlank(text.charCodeAt(k))) k += 1;
  return k;
}

function readPiece(text: string, from: number, stop: string): Piece | { fault: CommentFault } {
  const first = text[from];
  if (first === '"') return readQuoted(text, from, '"', "quoted");
  if (first === "'") return readQuoted(text, from, "'", "single");
  if (stop === "" && first === "[") return readBracketed(text, from, "[", "]", "square");
  if (stop === "" && first === "{") return readBracketed(text, from, "{", "}", "curly");
  let end = from;
  while (end < text.length && !isBlank(text.charCodeAt(end)) && text[end] !== stop) end += 1;
  return { text: text.slice(from, end), style: "bare", end };
}

function readQuoted(
  text: string,
  from: number,
  quote: string,
  style: Style,
): Piece | { fault: CommentFault } {
  let value = "";
  let start = from + 1;
  for (let k = start; k < text.length; k++) {
    if (text[k] === quote) return { text: value + text.slice(start, k), style, end: k + 1 };
    if (text[k] !== "\\" || k + 1 >= text.length) continue;
    value += text.slice(start, k) + (text[k + 1] === "n" ? "\n" : text[k + 1]);
    start = k + 2;
    k += 1;
  }
  return faultAt(from, "a quote is not closed");
}

function readBracketed(
  text: string,
  from: number,
  open: string,
  close: string,
  style: Style,
): Piece | { fault: CommentFault } {
  let depth = 0;
  let quoted = false;
  for (let k = from; k < text.length; k++) {
    const c = text[k];
    if (quoted && c === "\\") k += 1;
    else if (c === '"') quoted = !quoted;
    else if (quoted) continue;
    else if (c === open) depth += 1;
    else if (c === close) {
      depth -= 1;
      if (depth === 0) return { text: text.slice(from + 1, k), style, end: k + 1 };
    }
  }
  return faultAt(from, `a bracket “${open}” is not closed`);
}

function typed(piece: Piece): ExtendedValue {
  switch (piece.style) {
    case "single":
      return piece.text;
    case "bare":
      return scalar(piece.text);
    case "quoted":
      return oldArray(piece.text) ?? piece.text;
    case "curly":
      return oldArray(piece.text) ?? splitBlanks(piece.text).map(scalar);
    case "square":
      return newArray(piece.text);
  }
}

/** Integer, real, logical, then text. `TRuE` and other mixes are text (row X34). */
function scalar(text: string): number | boolean | string {
  const value = parseQuantity(text);
  if (value !== null) return value;
  if (/^(?:T|true|True|TRUE)$/.test(text)) return true;
  if (/^(?:F|false|False|FALSE)$/.test(text)) return false;
  return text;
}

/** `"1 2 3"` or `{1 2 3}`: an array only if every part is a number, or every part a logical. */
function oldArray(text: string): ExtendedValue | null {
  const parts = splitBlanks(text);
  if (parts.length < 2) return null;
  const values = parts.map(scalar);
  const kind = typeof values[0];
  return kind !== "string" && values.every((value) => typeof value === kind) ? values : null;
}

function splitBlanks(text: string): string[] {
  return text.split(/[ \t\v\f]+/).filter((part) => part !== "");
}

/** Inside of `[...]`: rows of an outer array, or values apart by commas; mixed ones become text throughout. */
function newArray(text: string): ExtendedValue {
  const trimmed = text.trim();
  if (trimmed.startsWith("[")) {
    const rows: ExtendedValue[] = [];
    let at = 0;
    while (at < trimmed.length) {
      const open = trimmed.indexOf("[", at);
      const close = trimmed.indexOf("]", open);
      if (open < 0 || close < 0) break;
      rows.push(flatArray(trimmed.slice(open + 1, close)));
      at = close + 1;
    }
    return rows;
  }
  return flatArray(trimmed);
}

function flatArray(text: string): ExtendedValue {
  const parts = splitOutsideQuotes(text);
  const values = parts.map((part) => (part.startsWith('"') ? unquote(part) : scalar(part)));
  const kind = typeof values[0];
  return values.every((value) => typeof value === kind) ? values : parts.map(unquote);
}

function unquote(part: string): string {
  if (!part.startsWith('"') || !part.endsWith('"') || part.length < 2) return part;
  return part.slice(1, -1).replace(/\\(.)/g, (_, c: string) => (c === "n" ? "\n" : c));
}

function splitOutsideQuotes(text: string): string[] {
  const parts: string[] = [];
  let start = 0;
  let quoted = false;
  for (let k = 0; k <= text.length; k++) {
    if (quoted && text[k] === "\\") k += 1;
    else if (text[k] === '"') quoted = !quoted;
    else if (k >= text.length || (!quoted && text[k] === ",")) {
      const part = text.slice(start, k).trim();
      if (part !== "") parts.push(part);
      start = k + 1;
    }
  }
  return parts;
}

/** Keys with a meaning of their own, in lower case: no quantity of the frame. */
export const RESERVED_KEYS: ReadonlySet<string> = new Set([
  "properties",
  "lattice",
  "pbc",
  "name",
  "label",
  "charge",
  "total_charge",
  "net_charge",
  "multiplicity",
  "spin_multiplicity",
  "mult",
  "unit",
  "units",
  "energy_unit",
  "energy_units",
]);

/**
 * Whether a comment is written as the specification of extended XYZ says: it announces columns, or it is nothing but
 * `key=value` pairs. Words between them make it plain text, whose numbers are no columns.
 *
 * @example isExtended("energy=-1.5 dipole=0.25") // true
 * @example isExtended("conformer 17  E = 35.1 kcal/mol") // false
 */
export function isExtended(comment: string): boolean {
  if (!comment.includes("=")) return false;
  if (hasProperties(comment)) return true;
  const parsed = parseExtendedComment(comment);
  return !("fault" in parsed) && parsed.keys.size > 0 && !parsed.oddities.has("bare-key");
}

/**
 * Whether a comment announces columns: `Properties` at the start of a word, then `=`. Such a comment must parse
 * (row X36); any other is plain text that may hold keys.
 */
export function hasProperties(comment: string): boolean {
  let at = comment.indexOf("Properties");
  while (at >= 0) {
    const starts = at === 0 || isBlank(comment.charCodeAt(at - 1)) || /["']/.test(comment[at - 1] ?? "");
    const next = comment[at + 10] === '"' ? at + 11 : at + 10;
    if (starts && comment[skipBlanks(comment, next)] === "=") return true;
    at = comment.indexOf("Properties", at + 1);
  }
  return false;
}

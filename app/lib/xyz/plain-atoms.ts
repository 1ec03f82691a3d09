import { type ParsedElement, parseElement } from "../chem/elements.ts";
import { decimalQuotient, POWERS_OF_TEN } from "../intake/numbers.ts";
import { type LineBuffer, MAX_LINE_BYTES } from "../text/lines.ts";
import { readSpecies } from "./species.ts";

/**
 * The fast path of the XYZ reader: atom lines `El x y z [more columns]` straight from bytes. Whatever is unusual
 * (labels, isotopes, commas, exponents, an unfinished line) is left to the slow path, which reads text and explains;
 * both give the same doubles, since each rounds correctly.
 */

const TAB = 9;
const LF = 10;
const CR = 13;
const BLANK = 32;
const COMMA = 44;
const POINT = 46;
const LONGEST_NAME = 16;

/** By byte: blanks, what may follow a number, and signs as 1 or -1. One load where comparisons would branch. */
const IS_BLANK = new Uint8Array(256);
const ENDS_NUMBER = new Uint8Array(256);
const SIGNS = new Int8Array(256);
for (const byte of [TAB, BLANK]) IS_BLANK[byte] = 1;
for (const byte of [TAB, BLANK, LF, CR]) ENDS_NUMBER[byte] = 1;
SIGNS[43] = 1;
SIGNS[45] = -1;

/**
 * Atomic number by the two bytes of a plain symbol in any case that leaves one element, the second a blank where it
 * has one letter; 0 for any other name.
 */
const symbolTable = makeSymbolTable();

function makeSymbolTable(): Uint8Array {
  const table = new Uint8Array(1 << 16);
  const letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz";
  for (const first of letters) {
    for (const second of ["", ...letters]) {
      const parsed = parseElement(first + second);
      if (parsed.kind !== "element" || parsed.isotope !== 0 || parsed.form !== "symbol") continue;
      const behind = second === "" ? [BLANK, TAB] : [second.charCodeAt(0)];
      for (const byte of behind) table[(first.charCodeAt(0) << 8) | byte] = parsed.z;
    }
  }
  return table;
}

export interface PlainTarget {
  /** Atoms to read in all, and those read so far. */
  readonly count: number;
  read: number;
  readonly elements: Uint8Array;
  readonly positions: Float64Array;
  /** Columns that must follow z; -1 lets the first line decide. */
  extra: number;
  /** Makes `elements` and `positions` long enough for all atoms. */
  makeRoom(): void;
  /** Takes note of a name that says more than its element: label, isotope, dummy, atomic number. */
  name(atom: number, token: string, parsed: NamedElement): void;
}

/** What a name can mean where it is clear. */
export type NamedElement = Extract<ParsedElement, { kind: "element" | "dummy" }>;

/**
 * Reads complete plain atom lines from the buffer into `target` and moves the buffer on, until the frame is full or a
 * line needs the slow path.
 */
export function readPlainAtoms(lines: LineBuffer, target: PlainTarget): void {
  target.makeRoom();
  let at = lines.at;
  let atom = target.read;
  while (atom < target.count) {
    const next = readPlainAtom(lines, at, target, atom);
    if (next < 0 || next - at > MAX_LINE_BYTES) break;
    at = next;
    atom += 1;
  }
  lines.line += atom - target.read;
  lines.at = at;
  target.read = atom;
}

/**
 * One line from `start`: writes the atom and returns where the next line begins, or -1. No bounds are checked, as the
 * byte behind the data is zero and zero ends every scan. What is rare stands in functions of its own: a short process
 * spends more on compiling this path than on running it, and a branch met late compiles it anew.
 */
function readPlainAtom(lines: LineBuffer, start: number, target: PlainTarget, atom: number): number {
  const { bytes, view } = lines;
  let at = start;
  while (IS_BLANK[bytes[at]!] === 1) at += 1;
  const from = at;
  const z = symbolTable[(bytes[at]! << 8) | bytes[at + 1]!]!;
  at += 2 - IS_BLANK[bytes[at + 1]!]!;
  const plain = z > 0 && IS_BLANK[bytes[at]!] === 1;
  if (!plain) at = endOfName(bytes, from);
  const { positions } = target;
  for (let k = 3 * atom; at >= 0 && k < 3 * atom + 3; k++) at = readCoordinate(bytes, view, at, positions, k);
  if (at < 0) return -1;
  if (bytes[at] === LF && target.extra <= 0) {
    target.extra = 0;
    at += 1;
  } else at = endOfLine(bytes, at, lines.end, target);
  if (at < 0) return -1;
  if (plain) target.elements[atom] = z;
  else takeName(bytes, from, target, atom);
  return at;
}

/** End of a name that is no bare symbol: a label, an isotope, a dummy, a number; -1 where it is not clear. */
function endOfName(bytes: Uint8Array, from: number): number {
  const to = nameTo(bytes, from);
  if (to === from) return -1;
  const { kind } = readSpecies(asciiText(bytes, from, to));
  return kind === "element" || kind === "dummy" ? to : -1;
}

function nameTo(bytes: Uint8Array, from: number): number {
  let at = from;
  let c = bytes[at]!;
  while (c > BLANK && c < 127 && c !== COMMA && at - from < LONGEST_NAME) c = bytes[++at]!;
  return at;
}

function takeName(bytes: Uint8Array, from: number, target: PlainTarget, atom: number): void {
  const token = asciiText(bytes, from, nameTo(bytes, from));
  const parsed = readSpecies(token);
  if (parsed.kind !== "element" && parsed.kind !== "dummy") return;
  target.elements[atom] = parsed.kind === "element" ? parsed.z : 0;
  target.name(atom, token, parsed);
}

/**
 * One number behind blanks, written to `out[place]`; returns its end, or -1 where the slow path has to look. Its digits
 * make one whole number, exact below 2^53, which is divided by an exact power of ten: one rounding, as `Number` does.
 */
function readCoordinate(
  bytes: Uint8Array,
  view: DataView,
  from: number,
  out: Float64Array,
  place: number,
): number {
  let at = from;
  while (IS_BLANK[bytes[at]!] === 1) at += 1;
  if (at === from) return -1;
  const sign = SIGNS[bytes[at]!]!;
  if (sign !== 0) at += 1;
  const head = at;
  let value = 0;
  for (let digit = bytes[at]! - 48; digit >= 0 && digit <= 9; digit = bytes[++at]! - 48) {
    value = 10 * value + digit;
  }
  let digits = at - head;
  let decimals = 0;
  if (bytes[at] === POINT) {
    const point = at + 1;
    at = point;
    for (let four = fourDigits(view, at); four >= 0; four = fourDigits(view, at)) {
      value = 10_000 * value + four;
      at += 4;
    }
    for (let digit = bytes[at]! - 48; digit >= 0 && digit <= 9; digit = bytes[++at]! - 48) {
      value = 10 * value + digit;
    }
    decimals = at - point;
    digits += decimals;
  }
  if (digits === 0 || ENDS_NUMBER[bytes[at]!] === 0) return -1;
  if (value >= 2 ** 53 || decimals > 22) value = longNumber(bytes, head, at, decimals);
  else if (decimals > 0) value /= POWERS_OF_TEN[decimals]!;
  if (value === Infinity) return -1;
  out[place] = sign < 0 ? -value : value;
  return at;
}

/** Four digits at once, most significant first; -1 where one of the bytes is none. */
function fourDigits(view: DataView, at: number): number {
  const four = view.getInt32(at, true);
  // Digits are 0x30 to 0x39: the upper half of each byte is 3, and still is with 6 added.
  if ((four & 0xf0f0f0f0) !== 0x30303030 || ((four + 0x06060606) & 0xf0f0f0f0) !== 0x30303030) return -1;
  const pairs = ((four & 0x0f0f0f0f) * 10 + ((four >>> 8) & 0x000f0f0f)) & 0x00ff00ff;
  return (pairs & 0xff) * 100 + (pairs >>> 16);
}

/** The magnitude of a number whose digits, from `head` up to `end`, do not fit into one exact double. */
function longNumber(bytes: Uint8Array, head: number, end: number, decimals: number): number {
  let high = 0;
  let low = 0;
  let digits = 0;
  for (let at = head; at < end; at++) {
    const digit = bytes[at]! - 48;
    if (digit < 0) continue;
    if (digits < 9) high = 10 * high + digit;
    else low = 10 * low + digit;
    digits += 1;
  }
  const value = digits > 18 ? Number.NaN : decimalQuotient(high, low, digits - 9, decimals);
  return Number.isNaN(value) ? Number(asciiText(bytes, head, end)) : value;
}

/** Passes further columns and the end of the line; -1 where they are not what the frame's first line has. */
function endOfLine(bytes: Uint8Array, from: number, end: number, target: PlainTarget): number {
  let at = from;
  let c = bytes[at]!;
  let extra = 0;
  for (;;) {
    while (c === BLANK || c === TAB) c = bytes[++at]!;
    if (c <= CR) break;
    // Commas in any column may mean that commas separate: the slow path looks at the whole line.
    while (c > BLANK && c !== COMMA && c < 128) c = bytes[++at]!;
    if (c !== BLANK && c !== TAB && c !== LF && c !== CR) return -1;
    extra += 1;
  }
  if (c === LF) at += 1;
  else if (c === CR && at + 1 < end) at += bytes[at + 1] === LF ? 2 : 1;
  else return -1;
  if (target.extra < 0) target.extra = extra;
  return extra === target.extra ? at : -1;
}

function asciiText(bytes: Uint8Array, from: number, to: number): string {
  let text = "";
  for (let k = from; k < to; k++) text += String.fromCharCode(bytes[k]!);
  return text;
}

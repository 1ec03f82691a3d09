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
const LONGEST_NAME = 16;

/** Atomic number by the two bytes of a plain symbol in any case that leaves one element; 0 for any other name. */
const symbolTable = makeSymbolTable();

function makeSymbolTable(): Uint8Array {
  const table = new Uint8Array(1 << 16);
  const letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz";
  for (const first of letters) {
    for (const second of ["", ...letters]) {
      const parsed = parseElement(first + second);
      if (parsed.kind !== "element" || parsed.isotope !== 0 || parsed.form !== "symbol") continue;
      table[(first.charCodeAt(0) << 8) | (second === "" ? BLANK : second.charCodeAt(0))] = parsed.z;
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
  const { bytes, end } = lines;
  target.makeRoom();
  let at = lines.at;
  let atom = target.read;
  while (atom < target.count) {
    const next = readPlainAtom(bytes, at, end, target, atom);
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
 * byte behind the data is zero and zero ends every scan. Long for the sake of speed: one pass, no allocation, and the
 * digits of a number gathered in two integers of at most 9 and 7 digits, which make one exact double below 2^53.
 */
function readPlainAtom(
  bytes: Uint8Array,
  start: number,
  end: number,
  target: PlainTarget,
  atom: number,
): number {
  let at = start;
  let c = bytes[at]!;
  while (c === BLANK || c === TAB) c = bytes[++at]!;
  const from = at;
  const first = c;
  c = bytes[++at]!;
  let second = BLANK;
  if (c !== BLANK && c !== TAB) {
    second = c;
    c = bytes[++at]!;
  }
  let z = c === BLANK || c === TAB ? symbolTable[(first << 8) | second]! : 0;
  let named: NamedElement | null = null;
  let token = "";
  if (z === 0) {
    at = from;
    c = first;
    while (c > BLANK && c < 127 && c !== COMMA && at - from < LONGEST_NAME) c = bytes[++at]!;
    if (at === from) return -1;
    token = asciiText(bytes, from, at);
    const parsed = readSpecies(token);
    if (parsed.kind !== "element" && parsed.kind !== "dummy") return -1;
    named = parsed;
    z = parsed.kind === "element" ? parsed.z : 0;
  }
  const positions = target.positions;
  for (let axis = 0; axis < 3; axis++) {
    if (c !== BLANK && c !== TAB) return -1;
    while (c === BLANK || c === TAB) c = bytes[++at]!;
    const start = at;
    const negative = c === 45;
    if (negative || c === 43) c = bytes[++at]!;
    const head = at;
    let high = 0;
    let low = 0;
    while (c >= 48 && c <= 57) {
      if (at - head < 9) high = (Math.imul(high, 10) + c - 48) | 0;
      else low = (Math.imul(low, 10) + c - 48) | 0;
      c = bytes[++at]!;
    }
    let digits = at - head;
    let decimals = 0;
    if (c === 46) {
      c = bytes[++at]!;
      const point = at;
      const whole = digits;
      while (c >= 48 && c <= 57) {
        if (whole + at - point < 9) high = (Math.imul(high, 10) + c - 48) | 0;
        else low = (Math.imul(low, 10) + c - 48) | 0;
        c = bytes[++at]!;
      }
      decimals = at - point;
      digits += decimals;
    }
    if (digits === 0 || (c !== BLANK && c !== TAB && c !== LF && c !== CR)) return -1;
    let value: number = high;
    let divided = false;
    if (digits > 9) {
      value = digits > 16 ? Infinity : high * POWERS_OF_TEN[digits - 9]! + low;
      if (value >= 9007199254740992) {
        // From 2^53 on the integer itself may be rounded.
        value = digits > 18 ? Number.NaN : decimalQuotient(high, low, digits - 9, decimals);
        if (Number.isNaN(value)) value = Math.abs(Number(asciiText(bytes, start, at)));
        if (value === Infinity) return -1;
        divided = true;
      }
    }
    if (decimals > 0 && !divided) value /= POWERS_OF_TEN[decimals]!;
    if (negative) value = -value;
    positions[3 * atom + axis] = value;
  }
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
  if (extra !== target.extra) {
    if (target.extra >= 0) return -1;
    target.extra = extra;
  }
  target.elements[atom] = z;
  if (named !== null) target.name(atom, token, named);
  return at;
}

function asciiText(bytes: Uint8Array, from: number, to: number): string {
  let text = "";
  for (let k = from; k < to; k++) text += String.fromCharCode(bytes[k]!);
  return text;
}

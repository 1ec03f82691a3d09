import { POWERS_OF_TEN } from "../intake/numbers.ts";
import { type LineBuffer, MAX_LINE_BYTES } from "../text/lines.ts";
import { readSpecies } from "../xyz/species.ts";

/**
 * The fast path of the SDF reader: lines of the V2000 atom and bond blocks straight from bytes. Whatever is unusual
 * (charges, isotopes, valences, labels, short lines, an unfinished line) is left to the slow path, which reads text
 * and explains; both give the same doubles, since ten columns hold at most nine digits and a quotient rounds once.
 */

const LF = 10;
const CR = 13;
const BLANK = 32;
const MINUS = 45;
const POINT = 46;
const ZERO = 48;
const NINE = 57;
const LETTER_A = 65;

export interface FastTarget {
  /** Atoms and bonds to read in all, and those read so far. */
  readonly count: number;
  readonly bondCount: number;
  read: number;
  bondsRead: number;
  readonly elements: Uint8Array;
  readonly positions: Float64Array;
  /** Triples of first atom, second atom (from 0) and type. */
  readonly bonds: Int32Array;
}

/** Atomic number by the two bytes of a symbol that means one element and nothing more; filled as symbols are met. */
const symbolTable = new Uint8Array(1 << 16);

/** Atomic number of a symbol of one letter (then a blank) or two; 0 where it needs the slow path. */
export function elementOf(first: number, second: number): number {
  const key = (first << 8) | second;
  const known = symbolTable[key]!;
  if (known !== 0) return known;
  // Letters only: a line that ends behind the symbol goes the slow way.
  if (first < LETTER_A || (second !== BLANK && second < LETTER_A)) return 0;
  const parsed = readSpecies(String.fromCharCode(first, second).trim());
  if (parsed.kind !== "element" || parsed.isotope !== 0 || parsed.form !== "symbol") return 0;
  symbolTable[key] = parsed.z;
  return parsed.z;
}

/** Reads complete plain atom lines into `target` until its atoms are full or a line needs the slow path. */
export function readFastAtoms(lines: LineBuffer, target: FastTarget): void {
  const { bytes, end } = lines;
  let at = lines.at;
  let atom = target.read;
  while (atom < target.count) {
    const next = readFastAtom(bytes, at, end, target, atom);
    if (next < 0 || next - at > MAX_LINE_BYTES) break;
    at = next;
    atom += 1;
  }
  lines.line += atom - target.read;
  lines.at = at;
  target.read = atom;
}

/**
 * One atom line from `start`: writes the atom and returns where the next line begins, or -1. No bounds are checked, as
 * the byte behind the data is zero and zero fits nowhere.
 */
function readFastAtom(
  bytes: Uint8Array,
  start: number,
  end: number,
  target: FastTarget,
  atom: number,
): number {
  let at = start;
  for (let axis = 0; axis < 3; axis++) {
    const stop = start + 10 * axis + 10;
    let c = bytes[at]!;
    while (c === BLANK && at < stop) c = bytes[++at]!;
    const negative = c === MINUS;
    if (negative) c = bytes[++at]!;
    let value = 0;
    let point = -1;
    const head = at;
    while (at < stop) {
      if (c >= ZERO && c <= NINE) value = value * 10 + (c - ZERO);
      else if (c === POINT && point < 0) point = at;
      else return -1;
      c = bytes[++at]!;
    }
    // At least one digit, and nothing beyond the columns, as a sign in the last one would be.
    if (at !== stop || at - head < (point < 0 ? 1 : 2)) return -1;
    if (point >= 0) value /= POWERS_OF_TEN[stop - 1 - point]!;
    target.positions[3 * atom + axis] = negative ? -value : value;
  }
  if (bytes[at] !== BLANK || bytes[at + 1] === 0) return -1;
  const z = elementOf(bytes[at + 1]!, bytes[at + 2]!);
  if (z === 0 || bytes[at + 3] !== BLANK) return -1;
  at += 4;
  let c = bytes[at]!;
  while (c === BLANK || c === ZERO) c = bytes[++at]!;
  const next = behindEnd(bytes, at, end);
  if (next >= 0) target.elements[atom] = z;
  return next;
}

/** Reads complete plain bond lines into `target` until its bonds are full or a line needs the slow path. */
export function readFastBonds(lines: LineBuffer, target: FastTarget): void {
  const { bytes, end } = lines;
  let at = lines.at;
  let bond = target.bondsRead;
  while (bond < target.bondCount && 3 * bond + 3 <= target.bonds.length) {
    const next = readFastBond(bytes, at, end, target, bond);
    if (next < 0 || next - at > MAX_LINE_BYTES) break;
    at = next;
    bond += 1;
  }
  lines.line += bond - target.bondsRead;
  lines.at = at;
  target.bondsRead = bond;
}

function readFastBond(
  bytes: Uint8Array,
  start: number,
  end: number,
  target: FastTarget,
  bond: number,
): number {
  const a = readThree(bytes, start);
  const b = a < 1 ? -1 : readThree(bytes, start + 3);
  const type = b < 1 ? -1 : readThree(bytes, start + 6);
  if (type < 1 || type > 4 || a === b || a > target.count || b > target.count) return -1;
  let at = start + 9;
  let c = bytes[at]!;
  while (c === BLANK || (c >= ZERO && c <= NINE)) c = bytes[++at]!;
  const next = behindEnd(bytes, at, end);
  if (next < 0) return -1;
  target.bonds[3 * bond] = a - 1;
  target.bonds[3 * bond + 1] = b - 1;
  target.bonds[3 * bond + 2] = type;
  return next;
}

/** A right-aligned whole number in three columns, or -1. */
function readThree(bytes: Uint8Array, at: number): number {
  let value = -1;
  for (let k = at; k < at + 3; k++) {
    const c = bytes[k]!;
    if (c >= ZERO && c <= NINE) value = Math.max(value, 0) * 10 + (c - ZERO);
    else if (c !== BLANK || value >= 0) return -1;
  }
  return value;
}

/** Where the next line begins if the line ends at `at`, else -1. */
export function behindEnd(bytes: Uint8Array, at: number, end: number): number {
  const c = bytes[at]!;
  if (c === LF && at < end) return at + 1;
  if (c === CR && at + 1 < end) return at + (bytes[at + 1] === LF ? 2 : 1);
  return -1;
}

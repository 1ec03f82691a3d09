import { decimalQuotient, POWERS_OF_TEN } from "../intake/numbers.ts";
import { type LineBuffer, MAX_LINE_BYTES } from "../text/lines.ts";
import { behindEnd, elementOf, type FastTarget } from "./fast-lines.ts";

/**
 * The fast path for the atom and bond lines of V3000, straight from bytes: atoms whose indices count up from 1, with
 * no keys behind them, and bonds without keys. Everything else is left to the slow path; both give the same doubles.
 */

const BLANK = 32;
const MINUS = 45;
const POINT = 46;
const ZERO = 48;
const NINE = 57;
/** `M  V30 ` */
const PREFIX = Uint8Array.of(77, 32, 32, 86, 51, 48, 32);

/** What `scanWhole` and `scanDecimal` read last; they return where they stopped, or -1. */
let whole = 0;
let decimal = 0;

/** Reads complete plain atom lines into `target` until its atoms are full or a line needs the slow path. */
export function readFastAtoms3000(lines: LineBuffer, target: FastTarget): void {
  const { bytes, end } = lines;
  let at = lines.at;
  let atom = target.read;
  while (atom < target.count) {
    const next = readAtom(bytes, at, end, target, atom);
    if (next < 0 || next - at > MAX_LINE_BYTES) break;
    at = next;
    atom += 1;
  }
  lines.line += atom - target.read;
  lines.at = at;
  target.read = atom;
}

/** Reads complete plain bond lines into `target` until its bonds are full or a line needs the slow path. */
export function readFastBonds3000(lines: LineBuffer, target: FastTarget): void {
  const { bytes, end } = lines;
  let at = lines.at;
  let bond = target.bondsRead;
  while (bond < target.bondCount && 3 * bond + 3 <= target.bonds.length) {
    const next = readBond(bytes, at, end, target, bond);
    if (next < 0 || next - at > MAX_LINE_BYTES) break;
    at = next;
    bond += 1;
  }
  lines.line += bond - target.bondsRead;
  lines.at = at;
  target.bondsRead = bond;
}

/** `M  V30 index symbol x y z 0`, one blank between; returns where the next line begins, or -1. */
function readAtom(bytes: Uint8Array, start: number, end: number, target: FastTarget, atom: number): number {
  let at = scanWhole(bytes, behindPrefix(bytes, start));
  if (at < 0 || whole !== atom + 1 || bytes[at] !== BLANK) return -1;
  const first = bytes[at + 1]!;
  const second = first > BLANK ? bytes[at + 2]! : 0;
  const z = second === 0 ? 0 : elementOf(first, second);
  if (z === 0) return -1;
  at += second === BLANK ? 2 : 3;
  for (let axis = 0; axis < 3; axis++) {
    if (bytes[at] !== BLANK) return -1;
    at = scanDecimal(bytes, at + 1);
    if (at < 0) return -1;
    target.positions[3 * atom + axis] = decimal;
  }
  if (bytes[at] !== BLANK || bytes[at + 1] !== ZERO) return -1;
  const next = behindEnd(bytes, at + 2, end);
  if (next >= 0) target.elements[atom] = z;
  return next;
}

/** `M  V30 index type atom atom`, one blank between. */
function readBond(bytes: Uint8Array, start: number, end: number, target: FastTarget, bond: number): number {
  let at = scanWhole(bytes, behindPrefix(bytes, start));
  if (at < 0 || bytes[at] !== BLANK) return -1;
  at = scanWhole(bytes, at + 1);
  const type = whole;
  if (at < 0 || bytes[at] !== BLANK || type < 1 || type > 4) return -1;
  at = scanWhole(bytes, at + 1);
  const a = whole;
  if (at < 0 || bytes[at] !== BLANK) return -1;
  at = scanWhole(bytes, at + 1);
  const b = whole;
  if (at < 0 || a < 1 || b < 1 || a > target.count || b > target.count || a === b) return -1;
  const next = behindEnd(bytes, at, end);
  if (next < 0) return -1;
  target.bonds[3 * bond] = a - 1;
  target.bonds[3 * bond + 1] = b - 1;
  target.bonds[3 * bond + 2] = type;
  return next;
}

function behindPrefix(bytes: Uint8Array, start: number): number {
  for (let k = 0; k < PREFIX.length; k++) if (bytes[start + k] !== PREFIX[k]) return -1;
  return start + PREFIX.length;
}

/** Digits, at most nine. */
function scanWhole(bytes: Uint8Array, from: number): number {
  if (from < 0) return -1;
  let at = from;
  let c = bytes[at]!;
  whole = 0;
  while (c >= ZERO && c <= NINE) {
    whole = whole * 10 + (c - ZERO);
    c = bytes[++at]!;
  }
  return at === from || at - from > 9 ? -1 : at;
}

/** A number without exponent of at most 18 digits, gathered in two halves of nine. */
function scanDecimal(bytes: Uint8Array, from: number): number {
  let at = from;
  let c = bytes[at]!;
  const negative = c === MINUS;
  if (negative) c = bytes[++at]!;
  let high = 0;
  let low = 0;
  let digits = 0;
  let point = -1;
  for (;;) {
    if (c >= ZERO && c <= NINE) {
      if (digits < 9) high = high * 10 + (c - ZERO);
      else low = low * 10 + (c - ZERO);
      digits += 1;
    } else if (c === POINT && point < 0) point = at;
    else break;
    c = bytes[++at]!;
  }
  if (digits === 0 || digits > 18) return -1;
  const decimals = point < 0 ? 0 : at - point - 1;
  const lowDigits = Math.max(0, digits - 9);
  let value = high * POWERS_OF_TEN[lowDigits]! + low;
  // From 2^53 on the integer itself may be rounded.
  if (value < 9007199254740992) value /= POWERS_OF_TEN[decimals]!;
  else value = decimalQuotient(high, low, lowDigits, decimals);
  if (Number.isNaN(value)) return -1;
  decimal = negative ? -value : value;
  return at;
}

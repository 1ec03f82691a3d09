import { ATOMIC_WEIGHTS, symbolOf } from "../chem/elements.ts";
import { plainBlanksAndMinus } from "../intake/numbers.ts";
import type { AtomFault } from "../xyz/atom-line.ts";
import type { TextLine } from "../xyz/frame-builder.ts";
import { bondTypeFault } from "./bond-types.ts";
import { intColumns, neededColumns, textColumns } from "./columns.ts";
import { isFault, misplaced, readCoordinate, readSymbol } from "./faults.ts";
import type { RecordBuilder } from "./record-builder.ts";

/** V2000 lines as text: the slow path, which accepts what is unusual and explains what is wrong. */

/** Charges by the code of the atom block; code 4 is a doublet radical (row S09). */
const CHARGE_CODES = [0, 3, 2, 1, 0, -1, -2, -3] as const;
const RADICAL_CODE = 4;

/**
 * Reads the next atom line into the builder: x, y, z in columns 1 to 30, symbol 32 to 34, mass difference 35 and 36,
 * charge code 37 to 39, valence 49 to 51.
 *
 * @returns what is wrong with it, or null
 */
export function takeAtomLine(builder: RecordBuilder, line: TextLine): AtomFault | null {
  const text = plainBlanksAndMinus(line.text);
  const atom = builder.read;
  if (text.trim() === "" || text.length < 32) {
    const message = `Here atom ${atom + 1} of ${builder.count} should stand: x, y, z in ten columns each, then the symbol.`;
    return misplaced("S01", message, text);
  }
  for (let axis = 0; axis < 3; axis++) {
    const from = 10 * axis;
    const reading = readCoordinate(textColumns(text, from, from + 10), axis, from + 1);
    if (typeof reading !== "number") return reading;
    builder.positions[3 * atom + axis] = reading;
  }
  if (text[30] !== " ") {
    return misplaced("S01", "Column 31 should be blank before the element.", text.slice(20, 40), 31);
  }
  const symbol = textColumns(text, 31, 34);
  const named = readSymbol(symbol, 32);
  if (isFault(named)) return named;
  builder.putName(atom, named);
  if (text !== line.text) builder.substitutions ||= line.number;
  const fault = takeAtomColumns(builder, atom, text);
  if (fault === null) builder.read += 1;
  return fault;
}

function takeAtomColumns(builder: RecordBuilder, atom: number, text: string): AtomFault | null {
  // Zeros say nothing, in whichever column they stand.
  if (/^[ 0]*$/.test(text.slice(34))) return null;
  const mass = intColumns(text, 34, 36);
  const code = intColumns(text, 36, 39);
  const valence = intColumns(text, 48, 51);
  if (mass === null || code === null || valence === null) {
    const message =
      "Mass difference (columns 35, 36), charge (37 to 39) and valence (49 to 51) are whole numbers.";
    return misplaced("S01", message, text.slice(34), 35);
  }
  const charge = CHARGE_CODES[code];
  if (charge === undefined) {
    const message = "The code of a charge runs from 0 to 7.";
    return misplaced("S09", message, text.slice(36, 39).trim(), 37);
  }
  builder.setCharge(atom, charge);
  if (code === RADICAL_CODE) builder.setRadical(atom, 2);
  if (valence !== 0) builder.setValence(atom, valence === 15 ? 0 : valence);
  return mass === 0 ? null : takeMassDifference(builder, atom, mass);
}

/** Counted from the standard atomic weight, rounded. */
function takeMassDifference(builder: RecordBuilder, atom: number, difference: number): AtomFault | null {
  const z = builder.elements[atom]!;
  const usual = Math.round(ATOMIC_WEIGHTS[z]!);
  if (usual === 0) {
    const message = `${symbolOf(z)} has no standard atomic weight that a difference could count from.`;
    return misplaced("S07", message, String(difference), 35);
  }
  if (usual + difference < 1) {
    return misplaced("S07", `${symbolOf(z)} has no such isotope.`, String(difference), 35);
  }
  builder.setIsotope(atom, usual + difference);
  return null;
}

/** Reads the next bond line: two atoms and the type, three columns each. */
export function takeBondLine(builder: RecordBuilder, line: TextLine): AtomFault | null {
  const { text } = line;
  const [a, b, type] = [0, 3, 6].map((from) => neededColumns(text, from, from + 3));
  const bond = builder.bondsRead + 1;
  if (text.trim() === "" || a == null || b == null || type == null) {
    const message = `Here bond ${bond} of ${builder.bondCount} should stand: two atoms and the type, three columns each.`;
    return misplaced("S01", message, text);
  }
  const fault = bondFault(builder.count, a, b, text) ?? bondTypeFault(type, text);
  if (fault === null) builder.putBond(a - 1, b - 1, type, line);
  return fault;
}

/** @param a first and second atom as written, from 1 */
function bondFault(atoms: number, a: number, b: number, text: string): AtomFault | null {
  if (a >= 1 && b >= 1 && a <= atoms && b <= atoms && a !== b) return null;
  const message =
    a === b
      ? "A bond leads from an atom to itself."
      : `The record has ${atoms} atoms, and a bond names another.`;
  return misplaced("S01", message, text);
}

import { SYMBOLS } from "../chem/elements.ts";
import { columnUnit, type KnownUnit } from "./column-unit.ts";

/** What the header of one quantity says. */
export interface ColumnHeader {
  /** Without the unit where that stands in brackets or behind a slash. */
  name: string;
  /** As written; null where the header names none. */
  unitText: string | null;
  unit: KnownUnit | null;
  /** True for `name [unit]`, which counts as answered; others are read off a name (row C06). */
  stated: boolean;
}

/** Longer headers are read as they stand: the patterns below would look at them too often. */
const MOST_CHARACTERS = 500;
const SQUARE = /^(.*?)\s*\[([^[\]]*)\]\s*$/s;
const ROUND = /^(.*\S)(\s*)\(([^()]{1,30})\)$/s;

/**
 * Reads name and unit off a header: `name [unit]`, `name (unit)`, `name / unit`, `name_kcal_mol` (row C06). What stands
 * in round brackets or behind a slash or an underscore counts only where it spells a unit, as in names of methods it
 * does not: `B3LYP/6-31G(d)`.
 *
 * @example readHeader("G [kcal/mol]") // { name: "G", unitText: "kcal/mol", stated: true, ... }
 * @example readHeader("HF/def2-SVP").unit // null
 */
export function readHeader(written: string): ColumnHeader {
  const text = written.trim();
  if (text.length > MOST_CHARACTERS) return longHeader(text);
  const square = SQUARE.exec(text);
  if (square) {
    const [, name = "", unitText = ""] = square;
    return { name, unitText: unitText.trim(), unit: columnUnit(unitText), stated: true };
  }
  return inRound(text) ?? behindSlash(text) ?? behindUnderscore(text) ?? plain(text);
}

/** Of a header without end only a unit in square brackets at its end is read. */
function longHeader(text: string): ColumnHeader {
  const at = text.lastIndexOf("[");
  if (at < 1 || text.length - at > 60 || !text.endsWith("]")) return plain(text);
  const unitText = text.slice(at + 1, -1).trim();
  return { name: text.slice(0, at).trimEnd(), unitText, unit: columnUnit(unitText), stated: true };
}

function plain(name: string): ColumnHeader {
  return { name, unitText: null, unit: null, stated: false };
}

function found(name: string, unitText: string): ColumnHeader | null {
  const unit = columnUnit(unitText);
  return unit === null ? null : { name, unitText, unit, stated: false };
}

function inRound(text: string): ColumnHeader | null {
  const [, name = "", blanks = "", unitText = ""] = ROUND.exec(text) ?? [];
  // "6-31G(D)" ends in the name of a basis set, "mu (D)" in a unit.
  if (unitText === "" || (unitText.length < 2 && blanks === "")) return null;
  return found(name, unitText);
}

function behindSlash(text: string): ColumnHeader | null {
  for (let at = text.indexOf("/"); at > 0; at = text.indexOf("/", at + 1)) {
    const unitText = text.slice(at + 1).trim();
    const apart = text[at - 1] === " ";
    if (unitText.length < 2 && !apart) continue;
    const header = found(text.slice(0, at).trim(), unitText);
    if (header) return header;
  }
  return null;
}

/** The name keeps such a unit: it is part of it. Single letters say too little. */
function behindUnderscore(text: string): ColumnHeader | null {
  const parts = text.split(/[_ ]+/);
  for (const count of [3, 2, 1]) {
    if (parts.length <= count) continue;
    const tail = parts.slice(-count);
    const unitText = tail.join(" ");
    if (unitText.length < 2) continue;
    const header = found(text, unitText);
    if (header && header.unit?.family !== "number") return header;
  }
  return null;
}

/** An atom that a header names, from 1. */
export interface NamedAtom {
  atom: number;
  /** Atomic number that the header claims; null where it gives the number only. */
  element: number | null;
  /** What the columns of a table share: "shift" in `shift_7` and `C1 shift`; null where the header is the atom alone. */
  quantity: string | null;
}

/** Words of quantities that belong to atoms: only these make an atom of a bare number behind a name. */
const PER_ATOM =
  /^(?:shifts?|shieldings?|sigma(?:[ _-]?iso)?|delta|iso(?:tropic)?|(?:partial[ _-]?)?charges?|q|mulliken|spin[ _-]?(?:density|population)|populations?|fukui|sasa|b[ _-]?factors?)$/i;

/**
 * The atom that a header names (row C15): `C1`, `H12`, `H_12`, `shift_7`, `shift C1`, `C1 shift`; null for other names.
 *
 * @example readAtom("shift_7") // { atom: 7, element: null, quantity: "shift" }
 * @example readAtom("H12") // { atom: 12, element: 1, quantity: null }
 */
export function readAtom(name: string): NamedAtom | null {
  if (name.length > MOST_CHARACTERS) return null;
  const alone = /^([A-Z][a-z]?)[ _]?(\d{1,5})$/.exec(name);
  if (alone) return named(alone[1], alone[2], null);
  const behind = /^(.*?[A-Za-z])[ _:#.-]+([A-Z][a-z]?)[ _]?(\d{1,5})$/.exec(name);
  if (behind && PER_ATOM.test(behind[1] ?? "")) return named(behind[2], behind[3], behind[1] ?? null);
  const before = /^([A-Z][a-z]?)[ _]?(\d{1,5})[ _:#.-]+(.+)$/.exec(name);
  if (before && PER_ATOM.test(before[3] ?? "")) return named(before[1], before[2], before[3] ?? null);
  const bare = /^(.*?[A-Za-z])[ _:#.-]+(\d{1,5})$/.exec(name);
  if (bare && PER_ATOM.test(bare[1] ?? ""))
    return { atom: Number(bare[2]), element: null, quantity: bare[1] ?? null };
  return null;
}

function named(
  symbol: string | undefined,
  number: string | undefined,
  quantity: string | null,
): NamedAtom | null {
  // Heavy hydrogen has symbols of its own.
  const element = symbol === "D" || symbol === "T" ? 1 : SYMBOLS.indexOf(symbol ?? "");
  return element < 1 ? null : { atom: Number(number), element, quantity };
}

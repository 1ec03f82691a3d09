import { plainBlanksAndMinus } from "../intake/numbers.ts";
import { readAtomLine, splitFields } from "./atom-line.ts";
import { PLAIN_LAYOUT } from "./layout.ts";

export interface CountLine {
  /** Atoms announced; may be 0, and any size. */
  readonly count: number;
  readonly text: string;
  /** What stands behind the count (row X02), or null. */
  readonly note: string | null;
}

/** Words that writers put behind the count. */
const NOTE_WORDS = /^(?:angstroms?|ångstr[öo]ms?|å|bohrs?|au|a\.u\.|atoms?)$/i;

/**
 * Reads a count line: a whole number, `+` allowed; what follows is kept as a note (row X02).
 *
 * @param anyNote accept any words behind the number, not only units and numbers
 * @returns null where the line is none, such as an atom line that begins with an atomic number
 * @example readCountLine("12 angstrom", false) // { count: 12, text: "12", note: "angstrom" }
 */
export function readCountLine(line: string, anyNote: boolean): CountLine | null {
  if (last !== null && line === last.line && anyNote === last.anyNote) return last.count;
  const count = parseCountLine(line, anyNote);
  if (count !== null) last = { line, anyNote, count };
  return count;
}

/** The count line read last: all frames of a file have the same. */
let last: { readonly line: string; readonly anyNote: boolean; readonly count: CountLine } | null = null;

function parseCountLine(line: string, anyNote: boolean): CountLine | null {
  const fields = splitFields(plainBlanksAndMinus(line.replace(/^\ufeff/, "")));
  const text = fields[0]?.text ?? "";
  if (!/^\+?\d+$/.test(text)) return null;
  const rest = fields.slice(1);
  if (rest.length > 0) {
    if (!anyNote && !rest.every((field) => NOTE_WORDS.test(field.text) || /^[+-]?\d+$/.test(field.text)))
      return null;
    if (readAtomLine(line, PLAIN_LAYOUT, new Float64Array(3), 0).kind !== "other") return null;
  }
  const note = rest.length === 0 ? null : rest.map((field) => field.text).join(" ");
  return { count: Number(text), text, note };
}

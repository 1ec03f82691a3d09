import type { ParsedElement } from "../chem/elements.ts";
import { readNumber } from "../intake/numbers.ts";
import { type AtomFault, elementFault, makeAtom, type NamedAtom, numberFault } from "../xyz/atom-line.ts";
import { readSpecies } from "../xyz/species.ts";

/** What is wrong with a piece of a record, in words. */

const AXES = ["x", "y", "z"] as const;

/** A fault of the record's form: it does not stand where the format has it. */
export function misplaced(code: string, message: string, found?: string, column?: number): AtomFault {
  return {
    code,
    reason: "unreadable",
    message,
    hint: "Write the record again with a program that keeps to the format.",
    found,
    column,
  };
}

/** Row S08. */
export function queryFeature(message: string, found: string): AtomFault {
  const hint = "Query features are no structure: write the molecule itself.";
  return { code: "S08", reason: "unreadable", message, hint, found };
}

/**
 * A coordinate's token, or why it is none.
 *
 * @param column of its first character in fixed columns, from 1; null in a format of words
 */
export function readCoordinate(token: string, axis: number, column: number | null): number | AtomFault {
  const { value, fault, caret } = readNumber(token);
  if (value !== null && !caret) return value;
  if (column === null) {
    return { ...numberFault(fault ?? "not-a-number", { text: token, column: 1 }, axis), column: undefined };
  }
  const explained = fault === "decimal-comma" || fault === "foreign-digit" || fault === "not-finite";
  if (explained && token !== "") {
    return numberFault(fault, { text: token, column }, axis);
  }
  const where = `columns ${column} to ${column + 9}`;
  return misplaced("S01", `The ${AXES[axis]} coordinate in ${where} is not a number.`, token, column);
}

/** Symbols that stand for many elements, or for a place where something hangs on. */
const QUERY_SYMBOLS = /^(?:A|AH|Q|QH|L|X|XH|M|MH|\*|R|R#|R\d{1,3}|\[.*\]|NOT ?\[.*\])$/i;

/**
 * What an element's symbol means in a MOL block; query symbols, numbers and unknown ones are faults (rows S08, X16, X20).
 *
 * @param column of its first character, from 1
 */
export function readSymbol(symbol: string, column: number): NamedAtom | AtomFault {
  if (QUERY_SYMBOLS.test(symbol)) {
    return { ...queryFeature("The atom stands for several elements or for a rest.", symbol), column };
  }
  // Numbers are no symbols here, unlike in XYZ.
  const parsed: ParsedElement = /^\d+$/.test(symbol)
    ? { kind: "unknown", code: "X20", message: "" }
    : readSpecies(symbol);
  return elementFault(parsed, { text: symbol, column }) ?? makeAtom(parsed, symbol, null);
}

/** Tells faults from what was read. */
export function isFault(value: object): value is AtomFault {
  return "reason" in value;
}

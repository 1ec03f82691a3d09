import type { ParsedElement } from "../chem/elements.ts";
import { type NumberFault, readNumber } from "../intake/numbers.ts";
import type { AtomFault } from "../xyz/atom-line.ts";

/** What is wrong with a piece of a record, in words. */

const AXES = ["x", "y", "z"] as const;

/** A fault of the record's form: it does not stand where the format has it. */
export function misplaced(code: string, message: string, found?: string, column?: number): AtomFault {
  return {
    code,
    reason: "unreadable",
    message,
    hint: "Write the record again with a program that keeps the columns of the format.",
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
 * @param where the columns, such as "columns 1 to 10", or "" in a format of words
 */
export function readCoordinate(
  token: string,
  axis: number,
  where: string,
  column: number,
): number | AtomFault {
  const { value, fault, caret } = readNumber(token);
  if (value !== null && !caret) return value;
  return coordinateFault(fault ?? "not-a-number", token, axis, where, column);
}

function coordinateFault(
  fault: NumberFault,
  token: string,
  axis: number,
  where: string,
  column: number,
): AtomFault {
  const message = `The ${AXES[axis]} coordinate${where && ` in ${where}`} is not a number.`;
  const rest = { message, found: token, column };
  switch (fault) {
    case "decimal-comma": {
      const hint = "Decimal comma? Write the numbers with a point and take the file in again.";
      return { code: "X22", reason: "unclear", hint, ...rest };
    }
    case "foreign-digit":
      return { code: "G14", reason: "unreadable", hint: "Write the digits as 0 to 9.", ...rest };
    case "not-finite": {
      const hint = "The program that wrote the file had no number to write.";
      return { code: "X23", reason: "unreadable", hint, ...rest };
    }
    case "lost-exponent":
    case "run-together":
    case "not-a-number":
      return where === ""
        ? { code: "X23", reason: "unreadable", hint: "Expected a number such as -1.25.", ...rest }
        : misplaced("S01", message, token, column);
  }
}

/** Symbols that stand for many elements, or for a place where something hangs on. */
const QUERY_SYMBOLS = /^(?:A|AH|Q|QH|L|X|XH|M|MH|\*|R|R#|R\d{1,3}|\[.*\]|NOT ?\[.*\])$/i;

/**
 * What an element's symbol means in a MOL block; query symbols and unknown ones are faults (rows S08, X16, X20).
 *
 * @param read `readSpecies`
 */
export function readSymbol(
  symbol: string,
  column: number,
  read: (symbol: string) => ParsedElement,
): Extract<ParsedElement, { kind: "element" | "dummy" }> | AtomFault {
  if (QUERY_SYMBOLS.test(symbol)) {
    return { ...queryFeature("The atom stands for several elements or for a rest.", symbol), column };
  }
  const parsed = read(symbol);
  if (parsed.kind === "unknown" || (parsed.kind === "element" && parsed.form === "number")) {
    return {
      code: "X20",
      reason: "unreadable",
      message: "The element is not known.",
      hint: "Write a symbol such as C.",
      found: symbol,
      column,
    };
  }
  if (parsed.kind === "ambiguous") {
    return {
      code: "X16",
      reason: "unclear",
      message: "The element has two readings.",
      hint: `${parsed.message} Write the symbol as in the periodic table and take the file in again.`,
      found: symbol,
      column,
    };
  }
  return parsed;
}

/** Tells faults from what was read. */
export function isFault(value: object): value is AtomFault {
  return "reason" in value;
}

import type { ParsedElement } from "../chem/elements.ts";
import { type NumberFault, numberLength, plainBlanksAndMinus, readNumber } from "../intake/numbers.ts";
import type { HoldReason } from "../intake/report.ts";
import type { Layout } from "./layout.ts";
import { readSpecies } from "./species.ts";

/** An atom line as text: the slow path, which accepts what is unusual and explains what is wrong. */

export interface AtomFault {
  readonly code: string;
  readonly reason: HoldReason;
  readonly message: string;
  readonly hint?: string;
  readonly found?: string;
  readonly column?: number;
}

/** What an atom's name says. */
export interface NamedAtom {
  z: number;
  isotope: number;
  /** The file's name of the atom where it says more than the element. */
  label: string | null;
  dummy: boolean;
  byNumber: boolean;
}

export interface ReadAtom extends NamedAtom {
  /** An exponent written `*^`. */
  caret: boolean;
  /** U+2212 or a blank beyond ASCII was read as - and space. */
  substituted: boolean;
  commas: boolean;
  /** Columns behind the ones that were read, in the plain form. */
  extra: number;
}

export type AtomLine =
  /** Not an atom line at all: blank, text, the next count. */
  { kind: "other" } | { kind: "fault"; fault: AtomFault } | { kind: "atom"; atom: ReadAtom };

interface Field {
  text: string;
  /** From 1. */
  column: number;
}

const MORE_WIDTH = "Write the file with more width between the columns.";
const AXES = ["x", "y", "z"] as const;

/** Fields apart by blanks, with their columns. */
export function splitFields(text: string): Field[] {
  const fields: Field[] = [];
  let at = 0;
  while (at < text.length) {
    while (at < text.length && text.charCodeAt(at) <= 32) at += 1;
    const from = at;
    while (at < text.length && text.charCodeAt(at) > 32) at += 1;
    if (at > from) fields.push({ text: text.slice(from, at), column: from + 1 });
  }
  return fields;
}

/** Fields apart by commas, or null where commas cannot be separators here: decimals must use a dot (row X21). */
function splitCommas(text: string): Field[] | null {
  const fields: Field[] = [];
  let start = 0;
  for (let k = 0; k <= text.length; k++) {
    if (k < text.length && text[k] !== ",") continue;
    const piece = text.slice(start, k);
    const trimmed = piece.trim();
    if (trimmed !== "" || k < text.length) {
      fields.push({ text: trimmed, column: start + 1 + piece.length - piece.trimStart().length });
    }
    start = k + 1;
  }
  if (fields.length < 4 || fields.some((field) => field.text === "" || /[ \t]/.test(field.text))) return null;
  const numbers = fields.slice(1, 4);
  if (numbers.some((field) => readNumber(field.text).fault !== null)) return null;
  // With more than four fields "C,0,12,1,5,..." could as well be decimal commas: the dots decide.
  if (fields.length > 4 && !numbers.some((field) => field.text.includes("."))) return null;
  return fields;
}

/**
 * Reads one atom line; writes x, y and z to `positions` at `offset` where it is an atom.
 *
 * @example readAtomLine("C 0.1 0.2 0.3", PLAIN_LAYOUT, positions, 0).kind // "atom"
 */
export function readAtomLine(
  line: string,
  layout: Layout,
  positions: Float64Array,
  offset: number,
): AtomLine {
  const text = plainBlanksAndMinus(line);
  let fields = splitFields(text);
  let commas = false;
  if (layout.columns === null && text.includes(",")) {
    const separated = splitCommas(text);
    if (separated) {
      fields = separated;
      commas = true;
    }
  }
  if (fields.length === 0 || isLoneInteger(fields)) return { kind: "other" };
  const wrong = layout.columns === null ? checkPlain(fields) : checkColumns(fields, layout.columns);
  if (wrong) return wrong;
  const species = fields[layout.species]!;
  const parsed = readSpecies(species.text);
  const fault = elementFault(parsed, species);
  if (fault) return { kind: "fault", fault };
  let caret = false;
  for (let axis = 0; axis < 3; axis++) {
    const field = fields[layout.position + axis]!;
    const reading = readNumber(field.text);
    if (reading.fault !== null) return { kind: "fault", fault: numberFault(reading.fault, field, axis) };
    if (reading.caret) caret = true;
    positions[offset + axis] = reading.value;
  }
  const { z, isotope, label, dummy, byNumber } = makeAtom(
    parsed,
    species.text,
    layout.label === null ? null : fields[layout.label]!.text,
  );
  const extra = (layout.columns ?? fields.length) - 4;
  const substituted = text !== line;
  return { kind: "atom", atom: { z, isotope, label, dummy, byNumber, caret, substituted, commas, extra } };
}

function isLoneInteger(fields: readonly Field[]): boolean {
  return fields.length === 1 && /^\+?\d+$/.test(fields[0]!.text);
}

/** Looks like a number that went wrong rather than like a word. */
function isNumberish(token: string): boolean {
  return /\d/.test(token) || /^\*+$/.test(token) || /^[+-]?(?:nan|inf|infinity)$/i.test(token);
}

/** The plain form: is this an atom line, and does it have its four columns? */
function checkPlain(fields: readonly Field[]): AtomLine | null {
  const [first, second] = fields;
  const areNumbers = (from: number) =>
    fields.length >= from + 3 &&
    fields.slice(from, from + 3).every((field) => readNumber(field.text).fault === null);
  if (/^\d+$/.test(first!.text)) {
    if (areNumbers(1)) return null;
    const indexed = second !== undefined && readSpecies(second.text).kind !== "unknown" && areNumbers(2);
    if (indexed && !/^\d/.test(second.text)) return { kind: "fault", fault: indexColumn(first!) };
    const brokenNumber = fields.length >= 4 && fields.slice(1, 4).every((field) => isNumberish(field.text));
    return brokenNumber ? null : { kind: "other" };
  }
  if (areNumbers(1)) return null;
  const isElement = readSpecies(first!.text).kind !== "unknown";
  if (fields.length === 1 && !isGlued(first!.text) && !(isElement && /^[A-Za-z]{1,2}$/.test(first!.text))) {
    return { kind: "other" };
  }
  if (fields.length > 1 && !(isElement && isNumberish(second!.text))) return { kind: "other" };
  return fields.length >= 4 ? null : { kind: "fault", fault: tooFew(fields) };
}

function checkColumns(fields: readonly Field[], columns: number): AtomLine | null {
  if (fields.length === columns) return null;
  const joined = fields.length < columns ? fields.find((field) => isRunTogether(field.text)) : undefined;
  if (joined) return { kind: "fault", fault: runTogetherFault(joined) };
  return {
    kind: "fault",
    fault: {
      code: "X31",
      reason: "unreadable",
      message: `The atom has ${fields.length} columns, “Properties” announces ${columns}.`,
      hint: "Correct Properties, or leave it out.",
    },
  };
}

/** `C-10.123-11.456-3.1`: even the element runs into the first number. */
function isGlued(token: string): boolean {
  return /^[A-Za-z]{1,2}[+-]?\d*\.\d+[+-]?\d*\./.test(token);
}

function isRunTogether(token: string): boolean {
  return readNumber(token).fault === "run-together";
}

function runTogetherFault(field: Field): AtomFault {
  return {
    code: "X24",
    reason: "unreadable",
    message: "Columns run together.",
    hint: MORE_WIDTH,
    found: field.text,
    column: field.column,
  };
}

function tooFew(fields: readonly Field[]): AtomFault {
  const joined = fields.find((field) => isRunTogether(field.text) || isGlued(field.text));
  if (joined) return runTogetherFault(joined);
  const comma = fields.find((field) => readNumber(field.text).fault === "decimal-comma");
  if (comma) return decimalComma(comma, "A coordinate");
  return {
    code: "X24",
    reason: "unreadable",
    message: `The line has ${fields.length} of the four columns element, x, y, z.`,
    hint: "The line may have been cut; columns that touch need more width.",
    found: fields.map((field) => field.text).join(" "),
  };
}

function indexColumn(field: Field): AtomFault {
  return {
    code: "X26",
    reason: "unclear",
    message: "A number stands before the element, perhaps an index.",
    hint: "Write the lines as element, x, y, z and take the file in again.",
    found: field.text,
    column: field.column,
  };
}

function decimalComma(field: Field, what: string): AtomFault {
  return {
    code: "X22",
    reason: "unclear",
    message: `${what} is not a number.`,
    hint: "Decimal comma? Write the numbers with a point and take the file in again.",
    found: field.text,
    column: field.column,
  };
}

/** What is wrong with an element's name; null where it is clear. Other readers use it too. */
export function elementFault(parsed: ParsedElement, field: Field): AtomFault | null {
  const at = { found: field.text, column: field.column };
  if (parsed.kind === "unknown") {
    const message = parsed.code === "X18" ? "The element is no atomic number." : "The element is not known.";
    const hint =
      parsed.code === "X18"
        ? "Atomic numbers run from 1 to 118."
        : "Write a symbol such as C, or a label such as C1.";
    return { code: parsed.code, reason: "unreadable", message, hint, ...at };
  }
  if (parsed.kind !== "ambiguous") return null;
  const hint = `${parsed.message} Write the symbol as in the periodic table and take the file in again.`;
  return { code: parsed.code, reason: "unclear", message: "The element has two readings.", hint, ...at };
}

/** What is wrong with a coordinate's token. Other readers use it too. */
export function numberFault(fault: NumberFault, field: Field, axis: number): AtomFault {
  const what = `The ${AXES[axis]} coordinate`;
  if (fault === "decimal-comma") return decimalComma(field, what);
  if (fault === "run-together") return runTogetherFault(field);
  const at = { found: field.text, column: field.column };
  const base = { reason: "unreadable" as const, message: `${what} is not a number.` };
  switch (fault) {
    case "foreign-digit":
      return { code: "G14", ...base, hint: "Write the digits as 0 to 9.", ...at };
    case "lost-exponent":
      return { code: "X23", ...base, hint: "The letter of an exponent is missing: write 1.0e-100.", ...at };
    case "not-finite":
      return { code: "X23", ...base, hint: "The program that wrote the file had no number to write.", ...at };
    case "not-a-number":
      return { code: "X23", ...base, hint: "Expected digits with a decimal point, such as -1.25.", ...at };
  }
}

/** An atom out of its name; `written` is its entry in a column of labels, null where there is none. */
export function makeAtom(parsed: ParsedElement, token: string, written: string | null): NamedAtom {
  // A column of labels that repeats the symbol says no more than the element.
  const label = written === token ? null : written;
  if (parsed.kind === "dummy")
    return { z: 0, isotope: 0, label: label ?? token, dummy: true, byNumber: false };
  if (parsed.kind !== "element") throw new TypeError(`No atom can be made of “${token}”.`);
  const { z, isotope, form } = parsed;
  const own = form === "label" ? token : null;
  return { z, isotope, label: label ?? own, dummy: false, byNumber: form === "number" };
}

/** Whether a line reads as an atom without fault: a comment that does may be a missing comment (row X06). */
export function looksLikeAtom(text: string, layout: Layout): boolean {
  const fields = splitFields(plainBlanksAndMinus(text));
  if (fields.length < 4 || numberLength(fields[0]!.text, 0) === fields[0]!.text.length) return false;
  return readAtomLine(text, layout, new Float64Array(3), 0).kind === "atom";
}

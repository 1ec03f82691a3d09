import type { SdfFields } from "../sdf/frame.ts";
import { scanComment } from "./comment-numbers.ts";
import { namesEnergy } from "./energy-words.ts";
import { oneText, readFieldNumber } from "./field-energies.ts";
import { readNumber } from "./numbers.ts";
import { withDecimalPoints } from "./reading-choices.ts";

/** Names of the numbers that are looked at. */
type Wanted = (name: string) => boolean;

/**
 * What stands in a comment line as its energy where that is written with a decimal comma (row X22): behind a key that
 * names an energy, or as all of the line. Null for any other comment.
 *
 * @param comment as the file has it
 * @param wanted keys of other numbers that are meant; left out: those that name an energy
 * @returns the text, such as `-15,775161`; whether it is a decimal comma is for the user to say
 * @example commaEnergy("energy=-15,775161") // "-15,775161"
 */
export function commaEnergy(comment: string, wanted: Wanted = namesEnergy): string | null {
  // Most comments have no comma, and one character is found faster than a word.
  if (!comment.includes(",") || !/\d*,\d/.test(comment)) return null;
  const whole = comment.trim();
  if (isComma(whole)) return whole;
  for (const [key, { text, number }] of scanComment(comment).keyed) {
    if (number === null && wanted(key) && isComma(text)) return text;
  }
  return null;
}

/**
 * The same of the data fields of an SDF record: a field that names an energy and whose value would be a number, with or
 * without a unit behind it, were its comma a point.
 *
 * @example commaField(new Map([["dG", ["-12,3 kcal/mol"]]])) // "-12,3"
 */
export function commaField(fields: SdfFields, wanted: Wanted = namesEnergy): string | null {
  for (const [name, values] of fields) {
    const text = oneText(values);
    if (!text.includes(",") || !wanted(name) || readFieldNumber(text) !== null) continue;
    const [token = ""] = text.split(/\s/, 1);
    if (isComma(token) && readFieldNumber(withDecimalPoints(text)) !== null) return token;
  }
  return null;
}

/** What to do about a number with a comma among properties: whose it is, only the user can say. */
export const COMMA_HINT =
  "Decimal comma or thousands? Write it with a point and nothing else, and send it again.";

/**
 * Whether a text is one number but for its comma, with or without a unit behind it: `1,25`, `1,25 Å`; several are none.
 *
 * @example isCommaNumber("1,25 D") // true
 * @example isCommaNumber("1,2 3,4") // false
 */
export function isCommaNumber(text: string): boolean {
  const [token = "", ...behind] = text.trim().split(/\s+/, 3);
  if (token.length > 80 || token.endsWith(",") || readNumber(token).fault !== "decimal-comma") return false;
  return behind.length === 0 || (behind.length === 1 && /^[^\d,.+-]/.test(behind[0] ?? ""));
}

/** Data fields of a file whose numbers have decimal commas, with points. */
export function fieldsWithPoints(fields: SdfFields): SdfFields {
  return new Map([...fields].map(([name, values]) => [name, values.map(withDecimalPoints)]));
}

/** A point beside the comma, as in `1.234,5`, is left to whoever writes the file. */
function isComma(text: string): boolean {
  return text.length <= 80 && !text.includes(".") && readNumber(text).fault === "decimal-comma";
}

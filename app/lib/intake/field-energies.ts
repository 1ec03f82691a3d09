import type { SdfFields } from "../sdf/frame.ts";
import type { CommentNumber, KeyedText, ScannedComment } from "./comment-numbers.ts";
import type { ExtractedEnergy } from "./energy-column.ts";
import { parseEnergyUnit } from "./energy-units.ts";
import { namesEnergy } from "./energy-words.ts";
import { numberLength, parseQuantity, plainBlanksAndMinus } from "./numbers.ts";

/** Words behind a number beyond which a value is a sentence. */
const MOST_WORDS = 3;
/** Text of a value that is kept where it is no number. */
const KEPT = 200;

/**
 * The data fields of an SDF record as the numbers and keys of a comment line are: every field whose value is one
 * number, with its name as the key and a unit from behind the number (`-12.3 kcal/mol`, row S20); the classes and units
 * that names carry (`MMFF94_ENERGY_KCAL_MOL`, `dG (kJ/mol)`) follow as for comments. `position` counts the fields.
 *
 * @example scanFields(new Map([["dG (kJ/mol)", ["-12.3"]]])).numbers[0]?.key // "dG (kJ/mol)"
 */
export function scanFields(fields: SdfFields): ScannedComment {
  const numbers: CommentNumber[] = [];
  const keyed = new Map<string, KeyedText>();
  let position = 0;
  for (const [name, values] of fields) {
    position += 1;
    const text = oneText(values);
    if (name === "" || text === "") continue;
    const read = fieldNumber(values);
    const number = read && { position, key: name, words: [], repeated: false, inArray: false, ...read };
    if (number) numbers.push(number);
    keyed.set(name, { text: text.slice(0, KEPT), number });
  }
  return { numbers, keyed, bare: false };
}

/**
 * The energy of one record by the rule `field:NAME`.
 *
 * @param name exact in case
 * @returns null where the record lacks the field or its value is blank; the text where it is no number, or where the tag
 *   stands twice with different values
 * @example extractFieldEnergy(fields, "UFF_ENERGY_KCAL_MOL") // { text: "45.681949", value: 45.681949 }
 */
export function extractFieldEnergy(fields: SdfFields, name: string): ExtractedEnergy {
  const values = fields.get(name);
  const text = values === undefined ? "" : oneText(values);
  if (values === undefined || text === "") return null;
  const read = fieldNumber(values);
  return read ? { text: read.text, value: read.value } : { problem: text.slice(0, KEPT) };
}

/**
 * What a record says of energies, as written: exact copies of a conformer have to agree in it. Null where no field
 * names an energy.
 */
export function energiesAsWritten(fields: SdfFields): string | null {
  const written: string[] = [];
  for (const [name, values] of fields) if (namesEnergy(name)) written.push(`${name}=${oneText(values)}`);
  return written.length === 0 ? null : written.join("\n");
}

/** The value of a field; of a tag that stands twice with different values both. */
export function oneText(values: readonly string[]): string {
  const [first = "", ...more] = values.map((value) => value.trim());
  return more.every((value) => value === first) ? first : [first, ...more].join(" | ");
}

type FieldNumber = Pick<CommentNumber, "text" | "unit" | "next"> & { value: number };

/** Values of one tag that differ are no number, whatever each of them is. */
function fieldNumber(values: readonly string[]): FieldNumber | null {
  const [first = "", ...more] = values.map((value) => value.trim());
  return more.every((value) => value === first) ? readFieldNumber(first) : null;
}

/**
 * A number with nothing but a few words behind it, of which the first may be its unit; null for any other value. A blank
 * line ends a value: text behind it belongs to the field and is remarked on (row S17), but the number stands before it,
 * unless what follows is one more number or a unit.
 *
 * @example readFieldNumber("0.6\n\nby hand") // { text: "0.6", value: 0.6, unit: null, next: "" }
 */
export function readFieldNumber(written: string): FieldNumber | null {
  const end = written.search(/\n[^\S\n]*\n/);
  if (end < 0) return readEndedNumber(written);
  const [next = ""] = written.slice(end).trim().split(/\s/, 1);
  const goesOn = numberLength(plainBlanksAndMinus(next), 0) > 0 || parseEnergyUnit(next) !== null;
  return goesOn ? null : readEndedNumber(written.slice(0, end).trim());
}

function readEndedNumber(written: string): FieldNumber | null {
  if (written.length > KEPT) return null;
  const text = plainBlanksAndMinus(written);
  const length = numberLength(text, 0);
  const value = parseQuantity(text.slice(0, length));
  if (value === null) return null;
  const rest = text.slice(length);
  const words = rest.split(/\s+/).filter((word) => word !== "");
  const [first = ""] = words;
  const unit = parseEnergyUnit(rest.trim()) ?? parseEnergyUnit(first);
  // "5x" is no number, "5kcal/mol" is one.
  if (rest !== "" && !/^[\s([]/.test(rest) && (unit === null || first.length < 2)) return null;
  if (words.length > MOST_WORDS || words.some((word) => numberLength(word, 0) > 0) || /\n/.test(rest))
    return null;
  return { text: text.slice(0, length), value, unit, next: first.replace(/^[([]|[)\]}]$/g, "") };
}

/** Why a pasted line was not taken. */
export type UnreadWhy = "comma" | "name" | "number";

/** Measured values out of a pasted list, and the lines that were not taken. */
export interface PastedValues<Key> {
  values: Map<Key, number>;
  unread: { line: string; why: UnreadWhy }[];
}

const COMMA = /^[-+]?\d+,\d+$/;

/**
 * Reads a list with a value a line. A decimal comma is taken only where somebody said that it is one.
 *
 * @param split what a line names, null where that is nothing known, and its last part
 * @param numberOf a number with a decimal point; null for any other text
 */
export function readLines<Key>(
  text: string,
  split: (line: string) => { key: Key | null; number: string | undefined },
  numberOf: (text: string | undefined) => number | null,
  commas: boolean,
): PastedValues<Key> {
  const values = new Map<Key, number>();
  const unread: PastedValues<Key>["unread"] = [];
  for (const line of text.split(/\r?\n/).map((one) => one.trim())) {
    if (line === "") continue;
    const { key, number } = split(line);
    const written = number?.replace("\u2212", "-");
    const comma = written !== undefined && COMMA.test(written);
    const value = numberOf(comma && commas ? written.replace(",", ".") : written);
    if (key !== null && value !== null) values.set(key, value);
    else unread.push({ line, why: comma && !commas ? "comma" : value === null ? "number" : "name" });
  }
  return { values, unread };
}

const LISTED = 3;
const list = (lines: readonly string[]) =>
  `${lines.slice(0, LISTED).join("; ")}${lines.length > LISTED ? ` and ${lines.length - LISTED} more` : ""}`;

/**
 * What was not read of a list, each reason by itself.
 *
 * @param what a line names: "atom", "property"
 * @example unreadWords([{ line: "C99 1", why: "name" }], "atom") // "No such atom in the table: C99 1."
 */
export function unreadWords(unread: PastedValues<unknown>["unread"], what: string): string {
  const of = (why: UnreadWhy) => unread.filter((one) => one.why === why).map(({ line }) => line);
  const [commas, names, numbers] = [of("comma"), of("name"), of("number")];
  return [
    ...(commas.length === 0 ? [] : [`A comma in the number: ${list(commas)}.`]),
    ...(names.length === 0 ? [] : [`No such ${what} in the table: ${list(names)}.`]),
    ...(numbers.length === 0 ? [] : [`No ${what} and number: ${list(numbers)}.`]),
  ].join(" ");
}

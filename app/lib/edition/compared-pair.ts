import { plural } from "../format.ts";

/**
 * Why two editions that an address names cannot be set beside each other; null where they can.
 *
 * @param asked their numbers; 0 for what is no number of an edition
 * @param listed numbers of the editions on the page
 * @example pairFault([1, 9], [2, 1]) // "Edition 9 is not listed here, so nothing is compared. Choose two editions of the list."
 */
export function pairFault(asked: readonly [number, number], listed: readonly number[]): string | null {
  const [from, to] = asked;
  const act =
    listed.length > 1
      ? "Choose two editions of the list."
      : `A comparison takes two editions; there ${listed.length === 1 ? "is" : "are"} ${plural(listed.length, "edition")} here.`;
  if (from === 0 || to === 0) {
    return `The address does not name two editions by their numbers, so nothing is compared. ${act}`;
  }
  const missing = [...new Set(asked)].filter((number) => !listed.includes(number));
  if (missing.length > 0) {
    const named = missing.length === 1 ? `Edition ${missing[0]} is` : `Editions ${missing.join(" and ")} are`;
    return `${named} not listed here, so nothing is compared. ${act}`;
  }
  return from === to ? `Edition ${from} is named twice, so nothing is compared. ${act}` : null;
}

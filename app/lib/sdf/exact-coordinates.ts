import { parseNumber } from "../intake/numbers.ts";

/**
 * V2000 has room for four decimals. So that a file written from finer coordinates reads back as the same doubles,
 * they go along in a data field, one atom a line; it counts only where it rounds to the coordinates of the block, so
 * that a program which moves the atoms and carries the data along changes nothing unseen.
 */
export const EXACT_FIELD = "COORDINATES_ANGSTROM";

/** Half of the last place of the block, and the rounding of the comparison. */
const HALF_PLACE = 0.5e-4 + 1e-9;

/**
 * The coordinates of the field.
 *
 * @param block coordinates as the block holds them, Å
 * @returns null where the field does not hold three numbers an atom that round to the block's
 * @example exactCoordinates("0.00001 0 1.23456", Float64Array.of(0, 0, 1.2346)) // [0.00001, 0, 1.23456]
 */
export function exactCoordinates(value: string, block: Float64Array): Float64Array | null {
  const tokens = value.split(/\s+/).filter((token) => token !== "");
  if (tokens.length !== block.length) return null;
  const exact = new Float64Array(block.length);
  for (let k = 0; k < exact.length; k++) {
    const number = parseNumber(tokens[k]!);
    if (number === null || !(Math.abs(number - block[k]!) <= HALF_PLACE)) return null;
    exact[k] = number;
  }
  return exact;
}

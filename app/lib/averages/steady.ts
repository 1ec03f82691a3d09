import { fixed } from "../format.ts";
import { wrapTurn } from "./angle.ts";
import type { Moments } from "./average.ts";

/** An angle that runs round counts as one shape within this part of a turn (15°): a bar of its distribution. */
const STEADY_TURN = 1 / 24;

/**
 * Says that a quantity does not vary over the ensemble, where its distribution would be one block without a word: values
 * that print alike, and angles that run round within 15°.
 *
 * @param digits decimals that the quantity is printed with
 * @returns null where it varies, or where fewer than two conformers have a value
 * @example steadyWords(momentsOf({ rule: "circular", values: [179, -179] }, facts), "°", 0) // "All conformers lie within 2° about 180°..."
 */
export function steadyWords(moments: Moments, unit: string, digits: number): string | null {
  const circular = moments.rule === "circular";
  const values: number[] = [];
  let conformers = 0;
  for (let i = 0; i < moments.values.length; i++) {
    if (moments.present[i] === 0) continue;
    conformers += 1;
    values.push(moments.values[i]!);
    if (moments.mirrored[i] === 1) values.push(-moments.values[i]!);
  }
  const first = values[0];
  if (first === undefined || conformers < 2) return null;
  let low = 0;
  let high = 0;
  for (const value of values) {
    const away = circular ? wrapTurn(value - first, moments.turn) : value - first;
    low = Math.min(low, away);
    high = Math.max(high, away);
  }
  const range = high - low;
  const of = (value: number, more = digits) =>
    `${fixed(value, more)}${unit === "" ? "" : unit === "°" ? "°" : `\u00a0${unit}`}`;
  const alike = range < 0.5 * 10 ** -digits;
  if (!alike && !(circular && range <= STEADY_TURN * moments.turn)) return null;
  const middle = Number((first + (low + high) / 2).toFixed(digits));
  // Wrapped once it is rounded: −179.6° is printed as 180°.
  const at = of(circular ? wrapTurn(middle, moments.turn) : middle);
  return alike
    ? `It is ${at} in every conformer: it does not vary over this ensemble, and populations have nothing to move.`
    : `All conformers lie within ${of(range)} about ${at}: beyond that it does not vary over this ensemble, and populations have little to move.`;
}

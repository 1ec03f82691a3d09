import { thermalEnergyKcal } from "../units.ts";
import { type Moments, perRadian, sums, valueBehind } from "./average.ts";
import type { AverageRule } from "./rule.ts";

/** What one conformer does to an average. */
export interface Contribution {
  /** Position in the set. */
  index: number;
  /** Its own value; null where missing. */
  value: number | null;
  /** Share of the population, among those with a value. */
  population: number;
  /** Share of the sum that makes the average; null where terms of both signs make shares meaningless. */
  share: number | null;
  /** The average if this conformer were not there; null where nothing would be left, or no direction. */
  without: number | null;
  /** Change of the average with its energy, unit per kcal/mol; null where the average has no value. */
  sensitivity: number | null;
}

/**
 * Contribution and sensitivity of every conformer: share p f / sum p f, the average without it, and the derivative
 * d<A>/de_j = -(p_j/RT) g'(M) (f_j - M), with M = sum p f and g the rule's way back (linear: -p_j (A_j - <A>)/RT).
 *
 * @param populations fractions, one a conformer
 * @example contributionsOf(momentsOf({ rule: "linear", values: [13, 4.5] }, facts), [0.6, 0.4], 298.15)[0].without // 4.5
 */
export function contributionsOf(
  moments: Moments,
  populations: ArrayLike<number>,
  temperatureK: number,
): Contribution[] {
  const rt = thermalEnergyKcal(temperatureK);
  const [share, first, second] = sums(moments, populations);
  const oneSign = hasOneSign(moments);
  return Array.from(moments.present, (present, index): Contribution => {
    const p = present === 1 ? populations[index]! / share : 0;
    if (present === 0 || moments.zeroDistance) {
      return { index, value: null, population: p, share: null, without: null, sensitivity: null };
    }
    const rest = sums(moments, populations, index);
    const slope = slopeOf(moments, index, first / share, second / share);
    return {
      index,
      value: moments.values[index]!,
      population: p,
      share: oneSign && first !== 0 ? (populations[index]! * moments.first[index]!) / first : null,
      without: rest[0] > 0 ? valueBehind(moments, rest[1] / rest[0], rest[2] / rest[0]) : null,
      sensitivity: slope === null ? null : (-p * slope) / rt,
    };
  });
}

/** Shares of an angle or of terms of both signs would add up to nothing a reader could use. */
function hasOneSign(moments: Moments): boolean {
  if (moments.second !== null || moments.fixed) return false;
  let least = Number.POSITIVE_INFINITY;
  let most = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < moments.first.length; i++) {
    if (moments.present[i] === 0) continue;
    least = Math.min(least, moments.first[i]!);
    most = Math.max(most, moments.first[i]!);
  }
  return least >= 0 || most <= 0;
}

/** g'(M) (f_j - M): what a unit of population moved to conformer j does to the average. */
function slopeOf(moments: Moments, j: number, first: number, second: number): number | null {
  const d = moments.first[j]! - first;
  const back: Record<Exclude<AverageRule, "circular">, () => number> = {
    linear: () => 1,
    odd: () => 1,
    rms: () => 1 / (2 * Math.sqrt(first)),
    "r-6": () => -(first ** (-7 / 6)) / 6,
    "r-3": () => -(first ** (-4 / 3)) / 3,
  };
  if (moments.rule !== "circular") {
    const slope = back[moments.rule]() * d;
    return Number.isFinite(slope) ? slope : null;
  }
  const square = first * first + second * second;
  if (valueBehind(moments, first, second) === null) return null;
  const dSine = (moments.second?.[j] ?? 0) - second;
  return ((first * dSine - second * d) / square) * perRadian(moments);
}

/**
 * The conformer whose absence would move the average most.
 *
 * @param average as it is, of the same quantity
 * @returns null where no single one can be taken away
 */
export function mostMoving(
  contributions: readonly Contribution[],
  average: number,
): { index: number; change: number } | null {
  let most: { index: number; change: number } | null = null;
  for (const { index, without } of contributions) {
    if (without === null) continue;
    const change = without - average;
    if (most === null || Math.abs(change) > Math.abs(most.change)) most = { index, change };
  }
  return most;
}

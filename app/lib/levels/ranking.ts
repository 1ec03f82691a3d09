import { placeRanks } from "../stats/ranks.ts";
import { lowestPlace } from "./align.ts";

/** The k lowest of two levels, and how many they have in common. */
export interface TopAgreement {
  /** Asked for. */
  k: number;
  /** Taken at the level and at the reference: more than k where several tie at rank k. */
  levelCount: number;
  referenceCount: number;
  common: number;
  /** common over the larger of the two counts. */
  share: number;
}

/**
 * Agreement of the k lowest. What ties with the k-th is taken too, and the counts say so.
 *
 * @throws RangeError unless k is a whole number from 1 to n
 * @example topAgreement([0.3, 0, 1.4, 1.1], [0, 0.4, 0.9, 1.5], 3) // common 2 of 3
 */
export function topAgreement(
  level: ArrayLike<number>,
  reference: ArrayLike<number>,
  k: number,
): TopAgreement {
  if (!Number.isInteger(k) || k < 1 || k > level.length) {
    throw new RangeError(`The lowest ${k} of ${level.length} cannot be taken.`);
  }
  const a = lowestSet(level, k);
  const b = lowestSet(reference, k);
  let common = 0;
  for (const place of a) if (b.has(place)) common++;
  return {
    k,
    levelCount: a.size,
    referenceCount: b.size,
    common,
    share: common / Math.max(a.size, b.size),
  };
}

function lowestSet(values: ArrayLike<number>, k: number): Set<number> {
  const limit = Float64Array.from(values).sort()[k - 1]!;
  const set = new Set<number>();
  for (let i = 0; i < values.length; i++) if (values[i]! <= limit) set.add(i);
  return set;
}

/** Where each level puts the other's lowest conformer. */
export interface LowestMeeting {
  /** Lowest at the reference, from 0; the first of equal ones. */
  referenceLowest: number;
  /** Its rank at the level, from 1, and its energy there above the level's lowest, kcal/mol. */
  rankAtLevel: number;
  aboveAtLevel: number;
  /** Lowest at the level, its rank and energy at the reference. */
  levelLowest: number;
  rankAtReference: number;
  aboveAtReference: number;
  /** All that share the lowest energy of each level, in order. */
  levelTies: number[];
  referenceTies: number[];
  /** One conformer is lowest at both (ties count). */
  same: boolean;
}

/**
 * Where each level puts the other's lowest conformer; equal energies share the better rank.
 *
 * @param level, reference kcal/mol, any zero, at least one conformer
 * @example meetLowest([0.3, 0, 1.4], [0, 0.4, 0.9]).rankAtLevel // 2, 0.3 up
 */
export function meetLowest(level: ArrayLike<number>, reference: ArrayLike<number>): LowestMeeting {
  const referenceLowest = lowestPlace(reference);
  const levelLowest = lowestPlace(level);
  const atLevel = placeRanks(level);
  const atReference = placeRanks(reference);
  const lowestOf = (ranks: ArrayLike<number>) =>
    Array.from(ranks, (rank, place) => (rank === 1 ? place : -1)).filter((place) => place >= 0);
  const [levelTies, referenceTies] = [lowestOf(atLevel), lowestOf(atReference)];
  return {
    referenceLowest,
    rankAtLevel: atLevel[referenceLowest]!,
    aboveAtLevel: level[referenceLowest]! - level[levelLowest]!,
    levelLowest,
    rankAtReference: atReference[levelLowest]!,
    aboveAtReference: reference[levelLowest]! - reference[referenceLowest]!,
    levelTies,
    referenceTies,
    same: levelTies.some((place) => atReference[place] === 1),
  };
}

/** Differences between conformers, which no zero of energy touches, kcal/mol. */
export interface PairDeviations {
  /** Over all pairs i < j: mean of |d_i - d_j|. */
  meanAbsolute: number;
  /** Root mean square, sqrt(2) times the standard deviation (n - 1). */
  rms: number;
}

/**
 * Offset-free summary of deviations: what two levels differ by in the energy difference of two conformers.
 * O(n log n): in rising order the i-th value enters i times with + and n - 1 - i times with -.
 *
 * @returns null for fewer than two conformers
 * @example pairDeviations([0, 1, 3]) // mean 2, RMS sqrt(14/3)
 */
export function pairDeviations(d: ArrayLike<number>): PairDeviations | null {
  const n = d.length;
  if (n < 2) return null;
  const sorted = Float64Array.from(d).sort();
  let mean = 0;
  for (let i = 0; i < n; i++) mean += sorted[i]! / n;
  let absolute = 0;
  let squares = 0;
  for (let i = 0; i < n; i++) {
    absolute += (2 * i - n + 1) * (sorted[i]! - mean);
    squares += (sorted[i]! - mean) ** 2;
  }
  return { meanAbsolute: absolute / ((n * (n - 1)) / 2), rms: Math.sqrt((2 * squares) / (n - 1)) };
}

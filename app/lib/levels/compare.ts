import { kendallTauB, pearson, spearman } from "../stats/correlation.ts";
import { meanAbsolute, rootMeanSquare, sampleSd, sum } from "../stats/moments.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { type Alignment, lowestPlace, offsetBetween } from "./align.ts";
import { jensenShannonBits, klDivergence, populationOverlap } from "./overlap.ts";
import { narrowestWindow, WINDOW_SHARES, type WindowReading, windowCurve } from "./window.ts";

/** A correlation of fewer conformers says nothing. */
export const FEWEST_FOR_CORRELATION = 4;

export interface ComparisonInput {
  /** kcal/mol, any zero; only conformers that have both energies. */
  level: ArrayLike<number>;
  /** kcal/mol, any zero, the same conformers in the same order. */
  reference: ArrayLike<number>;
  /** Copies that each conformer stands for; 1 each where left out. */
  weights?: ArrayLike<number>;
  temperatureK: number;
  /** Default "least-squares". */
  align?: Alignment;
  /** Conformer of the zero with `align: "common"`, from 0; the reference's lowest where left out. */
  commonPlace?: number;
}

/** Deviations d = level - reference and what follows from them, kcal/mol. */
export interface Deviations {
  n: number;
  /** Taken off level - reference to share one zero. */
  offset: number;
  /** Mean of d: 0 by definition with "least-squares". */
  msd: number;
  /** Mean of |d|. */
  mad: number;
  /** Root mean square of d, divided by n. */
  rmsd: number;
  /** Standard deviation of d about its mean, n - 1; null for one conformer. The same for every alignment. */
  sd: number | null;
  /** Largest |d|. */
  max: number;
}

export interface Correlations {
  /** null for fewer than four conformers or a constant level. */
  pearson: number | null;
  spearman: number | null;
  /** tau-b. */
  kendall: number | null;
}

export interface LevelComparison extends Deviations, Correlations {
  align: Alignment;
  /** Conformer with the largest |d|, from 0. */
  maxPlace: number;
  /** d of each conformer, kcal/mol. */
  deviations: Float64Array;
  /** Fractions at the temperature. */
  levelPopulations: Float64Array;
  referencePopulations: Float64Array;
  /** Shared population, fraction. */
  populationOverlap: number;
  /** Bits, 0 to 1. */
  jensenShannon: number;
  /** Nats; Infinity where the level gives 0 to what the reference populates. */
  klReferenceLevel: number;
  klLevelReference: number;
  /** Window at `level` that keeps 90, 95 and 99 % of the reference population. */
  window: WindowReading[];
}

/**
 * Two levels of theory on the same conformers: deviations, rank correlations, shared population and windows.
 *
 * d_i = (a_i - b_i) - offset, the offset by `align`; MSD, MAD and RMSD divide by n. Populations from energies and
 * weights at the temperature. The window is measured from the lowest conformer at `level`.
 *
 * @throws RangeError on no conformer, unequal lengths, an energy that is not finite, a weight or temperature not above zero
 * @example
 * compareLevels({ level: [0.3, 0, 1.4, 1.1, 2.9, 2.5], reference: [0, 0.4, 0.9, 1.5, 2.2, 3], temperatureK: 298.15 })
 * // mad 0.46667, rmsd 0.48189, kendall 0.6, populationOverlap 0.69924, window[1] { share: 0.95, kcal: 1.4, count: 4 }
 */
export function compareLevels(input: ComparisonInput): LevelComparison {
  const { level, reference, temperatureK, align = "least-squares" } = input;
  const n = level.length;
  if (n === 0) throw new RangeError("No conformer has both energies.");
  if (reference.length !== n) throw new RangeError(`${n} energies against ${reference.length}.`);
  const a = fromLowest(level);
  const b = fromLowest(reference);
  const weights = input.weights ?? new Float64Array(n).fill(1);
  const p = weigh(a, weights, temperatureK).populations;
  const q = weigh(b, weights, temperatureK).populations;
  const offset = offsetBetween(a, b, align, input.commonPlace);
  const deviations = Float64Array.from(a, (value, i) => value - b[i]! - offset);
  let maxPlace = 0;
  for (let i = 1; i < n; i++) {
    if (Math.abs(deviations[i]!) > Math.abs(deviations[maxPlace]!)) maxPlace = i;
  }
  const steps = windowCurve(a, q);
  return {
    n,
    align,
    // The caller's own zeros are part of the offset between the two lists as given.
    offset: offset + level[lowestPlace(level)]! - reference[lowestPlace(reference)]!,
    ...summariseDeviations(deviations, align),
    max: Math.abs(deviations[maxPlace]!),
    maxPlace,
    deviations,
    ...correlate(a, b),
    levelPopulations: p,
    referencePopulations: q,
    populationOverlap: populationOverlap(p, q),
    jensenShannon: jensenShannonBits(p, q),
    klReferenceLevel: klDivergence(q, p),
    klLevelReference: klDivergence(p, q),
    window: WINDOW_SHARES.map((share) => narrowestWindow(steps, share)),
  };
}

/** The list with its lowest at 0. */
export function fromLowest(values: ArrayLike<number>): Float64Array {
  const lowest = values[lowestPlace(values)] ?? 0;
  return Float64Array.from(values, (value) => value - lowest);
}

function summariseDeviations(d: Float64Array, align: Alignment) {
  return {
    // The mean about the mean is 0; adding up would leave a rounding.
    msd: align === "least-squares" ? 0 : sum(d) / d.length,
    mad: meanAbsolute(d),
    rmsd: rootMeanSquare(d),
    sd: sampleSd(d),
  };
}

/** The three correlations; null below four conformers and for constant input. */
export function correlate(a: ArrayLike<number>, b: ArrayLike<number>): Correlations {
  if (a.length < FEWEST_FOR_CORRELATION) return { pearson: null, spearman: null, kendall: null };
  return { pearson: pearson(a, b), spearman: spearman(a, b), kendall: kendallTauB(a, b) };
}

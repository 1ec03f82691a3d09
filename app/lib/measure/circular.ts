/** R below it: the mean of angles points nowhere, and a distribution is shown instead (our choice; no source). */
export const LEAST_RESULTANT = 0.1;

export interface CircularMean {
  /** Degrees in (-180, 180]; null where R is below 0.1 or no weight is left. */
  mean: number | null;
  /** Mean resultant length, 0 (spread evenly) to 1 (all alike). */
  resultant: number;
  /** Circular standard deviation sqrt(-2 ln R), degrees; null where R is 0. */
  deviation: number | null;
}

/**
 * Weighted mean of angles as points on a circle: z = Σ p exp(i t), mean = arg z, R = |z|, deviation = sqrt(-2 ln R).
 * Directional statistics as in Mardia and Jupp, Directional Statistics, 2000, chapters 2 and 3 (from memory).
 *
 * @param degrees one angle each; null is left out with its weight
 * @param weights not negative, any common scale; equal weights when absent
 * @throws RangeError on lists of different length, a weight below zero or one that is not finite
 * @example circularMean([350, 10]) // mean 0, resultant 0.984808
 */
export function circularMean(degrees: readonly (number | null)[], weights?: readonly number[]): CircularMean {
  if (weights !== undefined && weights.length !== degrees.length) {
    throw new RangeError(`Each angle needs one weight, found ${degrees.length} and ${weights.length}.`);
  }
  let x = 0;
  let y = 0;
  let total = 0;
  degrees.forEach((value, k) => {
    const weight = weights?.[k] ?? 1;
    if (!(weight >= 0 && Number.isFinite(weight)))
      throw new RangeError(`A weight is at least 0, found ${weight}.`);
    if (value === null) return;
    const radians = (value * Math.PI) / 180;
    x += weight * Math.cos(radians);
    y += weight * Math.sin(radians);
    total += weight;
  });
  if (total === 0) return { mean: null, resultant: 0, deviation: null };
  const resultant = Math.min(1, Math.hypot(x, y) / total);
  const turned = (Math.atan2(y, x) * 180) / Math.PI;
  return {
    // Just above -180 and within rounding of it is 180: the mean of 170 and -170 must not jump between the two ends.
    mean: resultant < LEAST_RESULTANT ? null : turned <= -180 + 1e-9 ? 180 : turned,
    resultant,
    deviation: resultant > 0 ? (Math.sqrt(Math.max(0, -2 * Math.log(resultant))) * 180) / Math.PI : null,
  };
}

/**
 * Circular mean of a torsion over conformers: one with mirror degeneracy 2 stands for a pair of mirror images and
 * enters half at t, half at -t.
 *
 * @param torsions degrees, null where undefined
 * @param populations fractions or any other weights
 * @param degeneracies 1 or 2
 */
export function torsionMean(
  torsions: readonly (number | null)[],
  populations: readonly number[],
  degeneracies: readonly number[],
): CircularMean {
  const values: (number | null)[] = [];
  const weights: number[] = [];
  torsions.forEach((value, k) => {
    const paired = degeneracies[k] === 2 && value !== null;
    values.push(value);
    weights.push((populations[k] ?? 0) / (paired ? 2 : 1));
    if (!paired) return;
    values.push(-value);
    weights.push((populations[k] ?? 0) / 2);
  });
  return circularMean(values, weights);
}

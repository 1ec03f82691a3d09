import { quantileOfSorted } from "./quantile.ts";
import { GENERATOR_NAME, type Generator, generator } from "./random.ts";

/** Resamples of a bootstrap where none is asked for: our own starting value. */
export const BOOTSTRAP_RESAMPLES = 2000;

export interface Interval {
  low: number;
  high: number;
  /** Resamples in which the figure exists (a correlation of a constant resample does not). */
  used: number;
}

export interface Bootstrap<Name extends string> {
  intervals: Record<Name, Interval | null>;
  resamples: number;
  seed: number;
  generator: typeof GENERATOR_NAME;
}

/**
 * Percentile intervals (2.5 to 97.5 %) of figures of a sample, by drawing its members with replacement
 * (Efron, J. Am. Stat. Assoc. 1987, 82, 171). Each resample is measured from scratch, offsets included.
 *
 * @param n members of the sample
 * @param measure figures of one resample, given as places 0 to n - 1; null where a figure does not exist. It may take
 *   further numbers from `draw` for a resample within the resample
 * @returns a null interval where a figure exists in fewer than 95 % of the resamples
 * @throws RangeError for an empty sample
 */
export function bootstrap<Name extends string>(
  n: number,
  names: readonly Name[],
  measure: (places: Int32Array, draw: Generator) => Record<Name, number | null>,
  { resamples = BOOTSTRAP_RESAMPLES, seed }: { resamples?: number; seed: number },
): Bootstrap<Name> {
  if (n < 1) throw new RangeError("No member to resample.");
  const draw = generator(seed);
  const places = new Int32Array(n);
  const found = new Map(names.map((name) => [name, [] as number[]]));
  for (let k = 0; k < resamples; k++) {
    for (let i = 0; i < n; i++) places[i] = draw.below(n);
    const figures = measure(places, draw);
    for (const name of names) {
      const value = figures[name];
      if (value !== null) found.get(name)!.push(value);
    }
  }
  const intervals = Object.fromEntries(
    names.map((name) => [name, intervalOf(found.get(name)!, resamples)]),
  ) as Record<Name, Interval | null>;
  return { intervals, resamples, seed, generator: GENERATOR_NAME };
}

function intervalOf(values: number[], resamples: number): Interval | null {
  if (values.length < 0.95 * resamples || values.length === 0) return null;
  const sorted = Float64Array.from(values).sort();
  return {
    low: quantileOfSorted(sorted, 0.025),
    high: quantileOfSorted(sorted, 0.975),
    used: sorted.length,
  };
}

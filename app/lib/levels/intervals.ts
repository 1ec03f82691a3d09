import { type Bootstrap, bootstrap, type Interval } from "../stats/bootstrap.ts";
import { type ComparisonInput, compareLevels } from "./compare.ts";
import { WINDOW_SHARES } from "./window.ts";

/** Fewest conformers whose resamples say anything: of two or three most resamples hold one of them twice. */
export const FEWEST_RESAMPLED = 4;

/** Figures of a comparison that get an interval. */
export const INTERVAL_NAMES = [
  "msd",
  "mad",
  "rmsd",
  "sd",
  "max",
  "pearson",
  "spearman",
  "kendall",
  "populationOverlap",
  "jensenShannon",
  "window90",
  "window95",
  "window99",
] as const;
export type IntervalName = (typeof INTERVAL_NAMES)[number];
export type ComparisonIntervals = Bootstrap<IntervalName>;
export type { Interval };

/**
 * Bootstrap intervals of a comparison, within this ensemble: conformers are drawn with replacement and compared from
 * scratch, so that each resample has its own offset, populations and windows. A zero at a named conformer stays there.
 *
 * The conformers of one molecule are not independent: the interval says how the figure hangs on which of them are
 * there, not how the levels differ in other molecules.
 *
 * @throws RangeError as `compareLevels`
 */
export function comparisonIntervals(
  input: ComparisonInput,
  options: { resamples?: number; seed: number },
): ComparisonIntervals {
  const n = input.level.length;
  const level = new Float64Array(n);
  const reference = new Float64Array(n);
  const weights = new Float64Array(n).fill(1);
  const named = input.align === "common" ? input.commonPlace : undefined;
  return bootstrap(
    n,
    INTERVAL_NAMES,
    (places) => {
      for (let i = 0; i < n; i++) {
        level[i] = input.level[places[i]!]!;
        reference[i] = input.reference[places[i]!]!;
        if (input.weights) weights[i] = input.weights[places[i]!]!;
      }
      const found = compareLevels({ ...input, level, reference, weights, commonPlace: undefined });
      const moved = named === undefined ? found : atNamed(found.deviations, found.offset, input, named);
      return {
        msd: moved.msd,
        mad: moved.mad,
        rmsd: moved.rmsd,
        sd: found.sd,
        max: moved.max,
        pearson: found.pearson,
        spearman: found.spearman,
        kendall: found.kendall,
        populationOverlap: found.populationOverlap,
        jensenShannon: found.jensenShannon,
        window90: found.window[0]?.kcal ?? null,
        window95: found.window[1]?.kcal ?? null,
        window99: found.window[2]?.kcal ?? null,
      };
    },
    options,
  );
}

/** Deviations of a resample moved to the zero of the named conformer, which it may not hold itself. */
function atNamed(d: Float64Array, offset: number, input: ComparisonInput, place: number) {
  const by = offset - (input.level[place]! - input.reference[place]!);
  let sum = 0;
  let absolute = 0;
  let squares = 0;
  let max = 0;
  for (let i = 0; i < d.length; i++) {
    const value = d[i]! + by;
    sum += value;
    absolute += Math.abs(value);
    squares += value * value;
    max = Math.max(max, Math.abs(value));
  }
  return {
    msd: sum / d.length,
    mad: absolute / d.length,
    rmsd: Math.sqrt(squares / d.length),
    max,
  };
}

/** Interval of the window for a share, where it is one of those read off. */
export function windowInterval(intervals: ComparisonIntervals, share: number): Interval | null {
  const at = WINDOW_SHARES.indexOf(share as (typeof WINDOW_SHARES)[number]);
  const name = (["window90", "window95", "window99"] as const)[at];
  return name === undefined ? null : intervals.intervals[name];
}

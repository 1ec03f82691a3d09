import { sampleSd } from "../stats/moments.ts";
import { quantileOfSorted } from "../stats/quantile.ts";
import { type DrawInput, forEachDraw } from "../trust/energy-draws.ts";
import { type Moments, sums, valueBehind } from "./average.ts";

/** The seed of every Monte Carlo figure that nobody chose another for; it stands beside the figure. */
export const DEFAULT_SEED = 20261;

/** What the error of the level makes of an average. */
export interface AverageError {
  /** Standard deviation over the draws; of an angle the circular one, in degrees. */
  sd: number;
  /** 2.5 and 97.5 % of the draws; null for an angle. */
  low: number | null;
  high: number | null;
  /** Standard deviation of the mean resultant length; null unless it is an angle. */
  resultantSd: number | null;
}

/**
 * Averages of several quantities in every draw of the populations, and how far they scatter. One walk over the draws
 * serves all quantities.
 *
 * @param input energies, weights, temperature, error and seed: every digit follows from them
 * @returns one entry a quantity; null where it has no value, or none in the draws
 */
export function averageErrors(quantities: readonly Moments[], input: DrawInput): (AverageError | null)[] {
  const made = quantities.map((): { values: number[]; resultants: number[] } => ({
    values: [],
    resultants: [],
  }));
  forEachDraw(input, (populations) => {
    quantities.forEach((moments, k) => {
      if (moments.zeroDistance) return;
      const [share, first, second] = sums(moments, populations);
      if (!(share > 0)) return;
      const value = valueBehind(moments.rule, first / share, second / share);
      if (value !== null) made[k]!.values.push(value);
      if (moments.second) made[k]!.resultants.push(Math.hypot(first, second) / share);
    });
  });
  return quantities.map((moments, k) => {
    const { values, resultants } = made[k]!;
    if (values.length < 2) return null;
    if (moments.fixed) return { sd: 0, low: 0, high: 0, resultantSd: null };
    if (moments.second) {
      return { sd: circularSd(values), low: null, high: null, resultantSd: sampleSd(resultants) };
    }
    const sorted = Float64Array.from(values).sort();
    return {
      sd: sampleSd(values) ?? 0,
      low: quantileOfSorted(sorted, 0.025),
      high: quantileOfSorted(sorted, 0.975),
      resultantSd: null,
    };
  });
}

function circularSd(degrees: readonly number[]): number {
  let x = 0;
  let y = 0;
  for (const value of degrees) {
    x += Math.cos((value * Math.PI) / 180);
    y += Math.sin((value * Math.PI) / 180);
  }
  const resultant = Math.min(1, Math.hypot(x, y) / degrees.length);
  // Directions that all agree leave a rounding below 1 that the logarithm would turn into a visible angle.
  return resultant > 1 - 1e-14 ? 0 : (Math.sqrt(-2 * Math.log(resultant)) * 180) / Math.PI;
}

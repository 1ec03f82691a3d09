import { sampleSd } from "../stats/moments.ts";
import { quantileOfSorted } from "../stats/quantile.ts";
import { type DrawInput, forEachDraw } from "../trust/energy-draws.ts";
import { circularDeviation } from "./angle.ts";
import { type Moments, perRadian, sums, valueBehind } from "./average.ts";

/** The seed of every Monte Carlo figure that nobody chose another for; it stands beside the figure. */
export const DEFAULT_SEED = 20261;

/** What the error of the level makes of an average. */
export interface AverageError {
  /** Standard deviation over the draws; of an angle the circular one, in its unit. */
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
      const value = valueBehind(moments, first / share, second / share);
      if (value !== null) made[k]!.values.push(value);
      if (moments.second) made[k]!.resultants.push(Math.hypot(first, second) / share);
    });
  });
  return quantities.map((moments, k) => {
    const { values, resultants } = made[k]!;
    if (values.length < 2) return null;
    if (moments.fixed) return { sd: 0, low: 0, high: 0, resultantSd: null };
    if (moments.second) {
      return {
        sd: circularSd(values, perRadian(moments)),
        low: null,
        high: null,
        resultantSd: sampleSd(resultants),
      };
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

/** Circular standard deviation of directions; exactly 0 where all agree. */
function circularSd(values: readonly number[], unitsInRadian: number): number {
  const resultantOf = (angles: readonly number[]): [number, number] => {
    let x = 0;
    let y = 0;
    for (const angle of angles) {
      x += Math.cos(angle);
      y += Math.sin(angle);
    }
    return [x, y];
  };
  const [x, y] = resultantOf(values.map((value) => value / unitsInRadian));
  const resultant = Math.min(1, Math.hypot(x, y) / values.length);
  const deviation = circularDeviation(resultant, () => {
    const reference = values[0] ?? 0;
    const away = values.map((value) => (value - reference) / unitsInRadian);
    const [cosines, sines] = resultantOf(away);
    const mean = Math.atan2(sines, cosines);
    return away.reduce((sum, angle) => sum + 2 * Math.sin((angle - mean) / 2) ** 2, 0) / values.length;
  });
  return (deviation ?? Number.POSITIVE_INFINITY) * unitsInRadian;
}

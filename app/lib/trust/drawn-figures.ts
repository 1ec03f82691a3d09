import { mean, sampleSd } from "../stats/moments.ts";
import { quantilesInPlace } from "../stats/quantile.ts";
import { GENERATOR_NAME } from "../stats/random.ts";
import { DRAWS, type DrawInput, forEachDraw } from "./energy-draws.ts";

/** What many draws say about one figure. */
export interface DrawnFigure {
  mean: number;
  /** Standard deviation over the draws. */
  sd: number;
  /** 2.5, 50 and 97.5 % of the draws lie below. */
  low: number;
  median: number;
  high: number;
  /** Standard error of `mean`, from the means of the antithetic pairs. */
  meanError: number;
}

/** Where figures by chance come from: it stands beside them. */
export interface DrawRecipe {
  draws: number;
  seed: number;
  generator: typeof GENERATOR_NAME;
}

export interface DrawnFigures extends DrawRecipe {
  figures: DrawnFigure[];
}

/**
 * Any figures of a population under the error of the energies: draws energies, weighs, computes, and summarises.
 *
 * @param count figures that `compute` fills
 * @param compute writes the figures of one draw into `out`; populations (fractions) and energies (kcal/mol) are reused
 * @throws RangeError as `forEachDraw`
 * @example
 * drawFigures({ energies: [0, 0.598], weights: [1, 2], temperatureK: 298.15, error: { sigma: 0.3 }, seed: 412 }, 1,
 *   (p, _e, out) => { out[0] = 13 * p[0] + 4.5 * p[1]; }).figures[0] // mean coupling and its 95 % range, Hz
 */
export function drawFigures(
  input: DrawInput,
  count: number,
  compute: (populations: Float64Array, energies: Float64Array, out: Float64Array) => void,
): DrawnFigures {
  const draws = input.draws ?? DRAWS;
  const columns = Array.from({ length: count }, () => new Float64Array(draws));
  const out = new Float64Array(count);
  forEachDraw(input, (populations, energies, draw) => {
    compute(populations, energies, out);
    for (let f = 0; f < count; f++) columns[f]![draw] = out[f]!;
  });
  return { figures: columns.map(summariseDraws), draws, seed: input.seed, generator: GENERATOR_NAME };
}

/** Summary of one figure over draws whose neighbours 2k, 2k + 1 are antithetic; sorts no list of the caller's. */
export function summariseDraws(values: Float64Array | Float32Array): DrawnFigure {
  const pairs = new Float64Array(values.length / 2);
  for (let k = 0; k < pairs.length; k++) pairs[k] = (values[2 * k]! + values[2 * k + 1]!) / 2;
  const [low = 0, median = 0, high = 0] = quantilesInPlace(values.slice(), [0.025, 0.5, 0.975]);
  return {
    mean: mean(values),
    sd: sampleSd(values) ?? 0,
    ...{ low, median, high },
    meanError: (sampleSd(pairs) ?? 0) / Math.sqrt(pairs.length),
  };
}

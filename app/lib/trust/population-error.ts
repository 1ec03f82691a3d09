import { lowestPlace } from "../levels/align.ts";
import { GENERATOR_NAME } from "../stats/random.ts";
import { type DrawnFigure, type DrawRecipe, summariseDraws } from "./drawn-figures.ts";
import { DRAWS, type DrawInput, forEachDraw } from "./energy-draws.ts";

/** Twice the error of a mean population that is small enough to show: half a percent point. */
export const ENOUGH = 0.005;
/** Values kept for quantiles: 160 MB of them. Beyond, fewer draws are taken and the result says how many. */
const MOST_VALUES = 40_000_000;
const FEWEST_DRAWS = 1000;

export interface PopulationError extends DrawRecipe {
  /** One a conformer, fractions. */
  populations: DrawnFigure[];
  /** Share of the draws in which each conformer has the lowest energy. */
  lowestShare: Float64Array;
  /** Conformers, from 0, that hold the lowest in 95 % of the draws: fewest first by that share. */
  lowestSet: number[];
  /** Conformers, from 0, that hold 95 % of the mean population, largest first. */
  populationSet: number[];
  /** Whether twice the error of every mean population lies below half a percent point. */
  enough: boolean;
}

/**
 * Populations with the uncertainty that the level's error makes, by Monte Carlo with antithetic pairs.
 *
 * The mean of the draws is not the population of the computed energies: errors pull shares together. Which conformer
 * is lowest goes by energy alone, without weights.
 *
 * @throws RangeError as `forEachDraw`
 * @example
 * populationError({ energies: [0, 0.5], temperatureK: 298.15, error: { sigma: 0.5 }, seed: 1 }).populations[0]
 * // mean 0.659, sd 0.217, 95 % range 0.183 to 0.960
 */
export function populationError(input: DrawInput): PopulationError {
  const n = input.energies.length;
  const draws = drawsFor(n, input.draws ?? DRAWS);
  const values = Array.from({ length: n }, () => new Float32Array(draws));
  const sums = new Float64Array(n);
  const lowest = new Float64Array(n);
  forEachDraw({ ...input, draws }, (populations, energies, draw) => {
    for (let i = 0; i < n; i++) {
      values[i]![draw] = populations[i]!;
      sums[i] = sums[i]! + populations[i]!;
    }
    const place = lowestPlace(energies);
    lowest[place] = lowest[place]! + 1;
  });
  const populations = values.map((list, i) => ({ ...summariseDraws(list), mean: sums[i]! / draws }));
  const lowestShare = lowest.map((count) => count / draws);
  return {
    populations,
    lowestShare,
    lowestSet: smallestSet(lowestShare, 0.95),
    populationSet: smallestSet(
      Float64Array.from(populations, (p) => p.mean),
      0.95,
    ),
    enough: populations.every((p) => 2 * p.meanError < ENOUGH),
    draws,
    seed: input.seed,
    generator: GENERATOR_NAME,
  };
}

/** Draws that the memory for quantiles allows; even. */
export function drawsFor(n: number, asked: number): number {
  const fitting = 2 * Math.floor(MOST_VALUES / Math.max(1, n) / 2);
  return Math.min(asked, Math.max(FEWEST_DRAWS, fitting));
}

/**
 * The smallest set of places, largest value first, whose values reach the share.
 *
 * @example smallestSet([0.2, 0.7, 0.1], 0.8) // [1, 0]
 */
export function smallestSet(values: ArrayLike<number>, share: number): number[] {
  const order = Array.from({ length: values.length }, (_, i) => i).sort(
    (a, b) => values[b]! - values[a]! || a - b,
  );
  const set: number[] = [];
  let total = 0;
  for (const place of order) {
    if (total >= share - 1e-12) break;
    set.push(place);
    total += values[place]!;
  }
  return set;
}

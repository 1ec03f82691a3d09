import { quantileOfSorted } from "../stats/quantile.ts";
import { GENERATOR_NAME } from "../stats/random.ts";
import { risingOrder } from "../stats/ranks.ts";
import type { DrawRecipe } from "../trust/drawn-figures.ts";
import { DRAWS, type EnergyError, forEachDraw } from "../trust/energy-draws.ts";
import { drawsFor } from "../trust/population-error.ts";
import { lowestPlace } from "./align.ts";
import { WINDOW_SHARES } from "./window.ts";

export interface BandStep {
  /** Window at the level, kcal/mol, and conformers within it. */
  kcal: number;
  count: number;
  /** Share of the true population within it: 2.5, 50 and 97.5 % of the draws lie below; fractions. */
  low: number;
  median: number;
  high: number;
  mean: number;
  /** Share of the draws in which the lowest conformer lies within it. */
  lowestKept: number;
}

export interface BandReading {
  share: number;
  /** Window that keeps the share, kcal/mol: 2.5, 50 and 97.5 % of the draws lie below. */
  low: number;
  median: number;
  high: number;
}

export interface WindowBand extends DrawRecipe {
  steps: BandStep[];
  readings: BandReading[];
}

/**
 * What a window at the level keeps when the reference itself is uncertain: its energies are drawn with their error,
 * weighed, and added up in the order of the level (Monte Carlo with antithetic pairs).
 *
 * @param input.level kcal/mol, any zero: fixes the order and the windows
 * @param input.reference kcal/mol, any zero, the same conformers
 * @param input.error of the reference, about its relative energies
 * @throws RangeError as `forEachDraw`
 */
export function windowBand(input: {
  level: ArrayLike<number>;
  reference: ArrayLike<number>;
  weights?: ArrayLike<number>;
  temperatureK: number;
  error: EnergyError;
  draws?: number;
  seed: number;
}): WindowBand {
  const order = risingOrder(input.level);
  const ends = stepEnds(input.level, order);
  const draws = drawsFor(ends.length, input.draws ?? DRAWS);
  const kept = ends.map(() => new Float32Array(draws));
  const needed = WINDOW_SHARES.map(() => new Float64Array(draws));
  const lowest = input.level[order[0] ?? 0]!;
  const rank = new Int32Array(order.length);
  for (const [k, place] of order.entries()) rank[place] = k;
  const firstHolding = new Float64Array(ends.length);
  forEachDraw({ ...input, energies: input.reference, draws }, (populations, energies, draw) => {
    let total = 0;
    let k = 0;
    let open = 0;
    for (const [s, end] of ends.entries()) {
      for (; k < end; k++) total += populations[order[k]!]!;
      kept[s]![draw] = Math.min(1, total);
      while (open < WINDOW_SHARES.length && total >= WINDOW_SHARES[open]! - 1e-12) {
        needed[open++]![draw] = input.level[order[end - 1]!]! - lowest;
      }
    }
    // Rounding may leave the whole set a trifle below a share close to 1.
    for (; open < WINDOW_SHARES.length; open++) needed[open]![draw] = input.level[order.at(-1)!]! - lowest;
    const at = rank[lowestPlace(energies)]!;
    const step = ends.findIndex((end) => at < end);
    firstHolding[step] = firstHolding[step]! + 1;
  });
  let held = 0;
  const steps = ends.map((end, s) => {
    held += firstHolding[s]!;
    const values = kept[s]!;
    let sum = 0;
    for (let d = 0; d < draws; d++) sum += values[d]!;
    values.sort();
    return {
      kcal: input.level[order[end - 1]!]! - lowest,
      count: end,
      low: quantileOfSorted(values, 0.025),
      median: quantileOfSorted(values, 0.5),
      high: quantileOfSorted(values, 0.975),
      mean: sum / draws,
      lowestKept: held / draws,
    };
  });
  const readings = WINDOW_SHARES.map((share, s) => {
    const sorted = needed[s]!.sort();
    return {
      share,
      low: quantileOfSorted(sorted, 0.025),
      median: quantileOfSorted(sorted, 0.5),
      high: quantileOfSorted(sorted, 0.975),
    };
  });
  return { steps, readings, draws, seed: input.seed, generator: GENERATOR_NAME };
}

/** Conformers up to the end of each step: equal energies come together. */
function stepEnds(level: ArrayLike<number>, order: readonly number[]): number[] {
  const ends: number[] = [];
  for (let k = 0; k < order.length; k++) {
    if (k + 1 === order.length || level[order[k + 1]!] !== level[order[k]!]) ends.push(k + 1);
  }
  return ends;
}

/** The last step within a window; null where it is narrower than the first. */
export function bandWithin(band: WindowBand, windowKcal: number): BandStep | null {
  let found: BandStep | null = null;
  for (const step of band.steps) {
    if (step.kcal > windowKcal) break;
    found = step;
  }
  return found;
}

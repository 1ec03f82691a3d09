import { risingOrder } from "../stats/ranks.ts";

/** Shares of the reference population that a window is read off for, as fractions. */
export const WINDOW_SHARES = [0.9, 0.95, 0.99] as const;

/** A sum of populations may end a rounding below the share that it holds. */
const ROUNDING = 1e-12;

export interface WindowStep {
  /** Window at the level, from its lowest conformer, that just reaches this step, kcal/mol. */
  kcal: number;
  /** Conformers within it; equal energies come together. */
  count: number;
  /** Reference population within it, fraction. */
  kept: number;
}

export interface WindowReading {
  /** Share asked for, fraction. */
  share: number;
  /** Narrowest window that holds it, kcal/mol. */
  kcal: number;
  /** Conformers within that window. */
  count: number;
}

/**
 * Reference population that a window at the level keeps: R(w) = sum of q_i over a_i - min a within w, one step an energy.
 *
 * @param level kcal/mol, any zero
 * @param population of the same conformers at the reference, fractions
 * @returns steps that rise in window; empty without conformers
 * @example windowCurve([0.3, 0, 1.4], [0.6, 0.3, 0.1]).map((s) => s.kept) // 0.3, 0.9, 1
 */
export function windowCurve(level: ArrayLike<number>, population: ArrayLike<number>): WindowStep[] {
  const order = risingOrder(level);
  const steps: WindowStep[] = [];
  let kept = 0;
  for (let k = 0; k < order.length; k++) {
    const place = order[k]!;
    kept += population[place]!;
    const step = { kcal: level[place]! - level[order[0]!]!, count: k + 1, kept: Math.min(1, kept) };
    if (k > 0 && level[place] === level[order[k - 1]!]) steps[steps.length - 1] = step;
    else steps.push(step);
  }
  return steps;
}

/**
 * The narrowest window whose step holds the share.
 *
 * @throws RangeError without a step
 * @example narrowestWindow(windowCurve(cheap, q), 0.95) // { share: 0.95, kcal: 1.4, count: 4 }
 */
export function narrowestWindow(steps: readonly WindowStep[], share: number): WindowReading {
  const step = steps.find((s) => s.kept >= share - ROUNDING) ?? steps.at(-1);
  if (!step) throw new RangeError("No conformer to take a window of.");
  return { share, kcal: step.kcal, count: step.count };
}

/** The window that takes in one step more, kcal/mol: a printed window stays below it. Infinity at the last step. */
export function nextWindow(steps: readonly { kcal: number }[], windowKcal: number): number {
  return steps.find((step) => step.kcal > windowKcal)?.kcal ?? Number.POSITIVE_INFINITY;
}

/** What a window keeps: the last step within it. */
export function keptWithin(steps: readonly WindowStep[], windowKcal: number): WindowStep {
  let best: WindowStep = { kcal: 0, count: 0, kept: 0 };
  for (const step of steps) {
    if (step.kcal > windowKcal) break;
    best = step;
  }
  return best;
}

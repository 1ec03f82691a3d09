import { fromLowest } from "../levels/compare.ts";
import { meanFinalPopulation, type PlanData } from "./evaluate.ts";
import { hoursEach } from "./hours.ts";
import type { Plan } from "./plan.ts";

export interface FrontPoint {
  /** Expected share of the final population that is kept, fraction. */
  kept: number;
  /** Core hours with the repeats. */
  cost: number;
  /** Windows of the cuts, kcal/mol. */
  windows: number[];
}

/** Windows tried for each cut: more would not be told apart in the figure. */
const MOST_WINDOWS = 60;

/**
 * The cheapest windows for each share: of all combinations of windows those that nothing beats in both cost and share.
 *
 * @returns by rising cost; null where a window lies at a level without energies or there are more than two cuts
 * @example planFront(plan, data)?.find((p) => p.kept >= 0.99)?.cost // what 99 % costs at least
 */
export function planFront(plan: Plan, data: PlanData): FrontPoint[] | null {
  if (plan.steps.length > 2) return null;
  if (plan.steps.length === 2 && data.known[0] === null) return null;
  const population = meanFinalPopulation(plan, data);
  const cost = plan.steps.map((step) => hoursEach(step.hours, data.atoms).hours * (1 + plan.failRate));
  const start = fromLowest(data.start);
  const everybody = Array.from(start, (_, i) => i);
  const points: FrontPoint[] = [];
  for (const first of cuts(start, everybody)) {
    if (plan.steps.length === 1) {
      points.push({
        kept: sumOf(first.inside, population),
        cost: first.inside.length * cost[0]!,
        windows: [first.window],
      });
      continue;
    }
    for (const second of cuts(data.known[0]!, first.inside)) {
      points.push({
        kept: sumOf(second.inside, population),
        cost: first.inside.length * cost[0]! + second.inside.length * cost[1]!,
        windows: [first.window, second.window],
      });
    }
  }
  return unbeaten(points);
}

/** The windows of one cut with who lies inside, thinned to what a figure can show. */
function cuts(
  energies: ArrayLike<number>,
  inside: readonly number[],
): { window: number; inside: number[] }[] {
  const order = [...inside].sort((a, b) => energies[a]! - energies[b]! || a - b);
  const stride = Math.max(1, Math.ceil(order.length / MOST_WINDOWS));
  const found: { window: number; inside: number[] }[] = [];
  for (let k = 0; k < order.length; k++) {
    const last = k === order.length - 1;
    if (!last && (k % stride !== 0 || energies[order[k + 1]!] === energies[order[k]!])) continue;
    found.push({ window: energies[order[k]!]! - energies[order[0]!]!, inside: order.slice(0, k + 1) });
  }
  return found;
}

function sumOf(inside: readonly number[], population: Float64Array): number {
  return Math.min(
    1,
    inside.reduce((sum, i) => sum + population[i]!, 0),
  );
}

function unbeaten(points: FrontPoint[]): FrontPoint[] {
  points.sort((a, b) => a.cost - b.cost || b.kept - a.kept);
  const front: FrontPoint[] = [];
  for (const point of points) if (point.kept > (front.at(-1)?.kept ?? -1)) front.push(point);
  return front;
}

/** Shares closer than this are the same share, summed in another order. */
const SAME_SHARE = 1e-11;

/**
 * Places of plans by rising share kept, the cheaper one first where two keep the same.
 *
 * @example keptOrder([{ kept: 0.95, cost: 74 }, { kept: 0.9, cost: 60 }]) // [1, 0]
 */
export function keptOrder(plans: readonly { kept: number; cost: number }[]): number[] {
  const share = plans.map(({ kept }) => Math.round(kept / SAME_SHARE));
  return plans
    .map((_, k) => k)
    .sort((a, b) => share[a]! - share[b]! || plans[a]!.cost - plans[b]!.cost || a - b);
}

/**
 * Core hours for each further percent of the population between plans, in order of what they keep.
 *
 * @returns by place in the list given; null for the one that keeps least, and where a plan keeps no more than the one
 *   before or costs less than it
 * @example marginalCosts([{ kept: 0.9, cost: 60 }, { kept: 0.95, cost: 74 }]) // [null, 2.8]
 */
export function marginalCosts(plans: readonly { kept: number; cost: number }[]): (number | null)[] {
  const order = keptOrder(plans);
  const found: (number | null)[] = plans.map(() => null);
  for (let k = 1; k < order.length; k++) {
    const [low, high] = [plans[order[k - 1]!]!, plans[order[k]!]!];
    const gain = 100 * (high.kept - low.kept);
    const more = high.cost - low.cost;
    if (gain > 100 * SAME_SHARE && more >= 0) found[order[k]!] = more / gain;
  }
  return found;
}

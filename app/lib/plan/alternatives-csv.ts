import { toCsv } from "../workbench/tsv.ts";
import type { PlanOutcome } from "./evaluate.ts";
import { keptOrder, marginalCosts } from "./front.ts";
import type { PlanSet } from "./plan.ts";
import { hoursOpen } from "./words.ts";

/** Places of the plans of a set by rising share kept. */
export function orderOf(outcomes: readonly PlanOutcome[]): number[] {
  return keptOrder(outcomes.map(({ kept, cost }) => ({ kept: kept.mean, cost })));
}

/**
 * Core hours of each further percent between the plans of a set whose costs are known.
 *
 * @param outcomes one a plan, in the order of the set
 * @returns by place; null as in `marginalCosts`, and for a plan without a known cost
 */
export function marginalOf({ plans }: PlanSet, outcomes: readonly PlanOutcome[]): (number | null)[] {
  const places = plans.flatMap(({ plan }, k) => (hoursOpen(plan) ? [] : [k]));
  const costs = marginalCosts(places.map((k) => ({ kept: outcomes[k]!.kept.mean, cost: outcomes[k]!.cost })));
  return plans.map((_, k) => costs[places.indexOf(k)] ?? null);
}

/**
 * Plans side by side, a row each by rising share kept: windows and structures of every step, cost, waiting, population kept and lost, and the
 * core hours of each further percent. Costs are empty where the hours of a step are not known.
 *
 * @param outcomes one a plan, in the order of the set
 */
export function alternativesCsv(set: PlanSet, outcomes: readonly PlanOutcome[]): string {
  const { plans, chosen } = set;
  const deepest = plans.reduce((most, { plan }) => Math.max(most, plan.steps.length), 0);
  const marginal = marginalOf(set, outcomes);
  const steps = Array.from({ length: deepest }, (_, s) => s);
  return toCsv(
    [
      "plan",
      "at hand",
      ...steps.flatMap((s) => [`level ${s + 1}`, `window ${s + 1} [kcal/mol]`, `structures ${s + 1}`]),
      "cost [core hours]",
      "waiting [h]",
      "kept [%]",
      "kept at 2.5 % [%]",
      "kept at 97.5 % [%]",
      "lost [%]",
      "lowest kept [% of the draws]",
      "each percent above the last [core hours]",
    ],
    orderOf(outcomes).map((k) => {
      const { name, plan } = plans[k]!;
      const outcome = outcomes[k]!;
      const { kept } = outcome;
      return [
        name,
        k === chosen ? "yes" : "no",
        ...steps.flatMap((s) => {
          const [step, of] = [plan.steps[s], outcome.steps[s]];
          return step && of ? [step.name, of.windowKcal ?? "all", of.carried.mean] : ["", null, null];
        }),
        ...(hoursOpen(plan) ? [null, null] : [outcome.cost, outcome.wall]),
        100 * kept.mean,
        100 * kept.low,
        100 * kept.high,
        100 * Math.max(0, 1 - kept.mean),
        100 * outcome.lowestKept,
        marginal[k] ?? null,
      ];
    }),
  );
}

import { toCsv } from "../workbench/tsv.ts";
import type { PlanOutcome } from "./evaluate.ts";
import { marginalCosts } from "./front.ts";
import type { PlanSet } from "./plan.ts";

/**
 * Plans side by side, a row each: windows and structures of every step, cost, waiting, population kept and lost, and the
 * core hours of each further percent. Costs are empty where the hours of a step are not known.
 *
 * @param outcomes one a plan, in the order of the set
 */
export function alternativesCsv({ plans, chosen }: PlanSet, outcomes: readonly PlanOutcome[]): string {
  const deepest = plans.reduce((most, { plan }) => Math.max(most, plan.steps.length), 0);
  const marginal = marginalCosts(outcomes.map(({ kept, cost }) => ({ kept: kept.mean, cost })));
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
    plans.map(({ name, plan }, k) => {
      const outcome = outcomes[k]!;
      const open = plan.steps.some(({ hours }) => hours.from === "unknown");
      const { kept } = outcome;
      return [
        name,
        k === chosen ? "yes" : "no",
        ...steps.flatMap((s) => {
          const [step, of] = [plan.steps[s], outcome.steps[s]];
          return step && of ? [step.name, of.windowKcal ?? "all", of.carried.mean] : ["", null, null];
        }),
        ...(open ? [null, null] : [outcome.cost, outcome.wall]),
        100 * kept.mean,
        100 * kept.low,
        100 * kept.high,
        100 * Math.max(0, 1 - kept.mean),
        100 * outcome.lowestKept,
        open ? null : (marginal[k] ?? null),
      ];
    }),
  );
}

import { DRAWS } from "../trust/energy-draws.ts";
import { defaultHours } from "./hours.ts";
import type { Cut, Plan, PlanSet } from "./plan.ts";

/** Seed of a new plan; stored with it. */
export const PLAN_SEED = 412;
/** What a new plan starts with, until somebody sets it: our own values. */
export const START_VALUES = {
  /** kcal/mol between two levels, and on energies that are known. */
  sigma: 0.5,
  knownSigma: 0.3,
  failRate: 0.04,
  slots: 8,
  coresPerSlot: 4,
} as const;

/**
 * A first set of plans for the levels that there are: from the first level to the last, at 90, 95, 99 and 100 % of the
 * final population. With one level the next is predicted.
 *
 * @param levels id and name in order of arrival, at least one
 * @param n conformers: fewer draws where there are very many
 */
export function firstPlans(
  levels: readonly { id: string; name: string }[],
  options: { sift: string | null; temperatureK: number; n: number },
): PlanSet {
  const [start, ...rest] = levels;
  if (!start) throw new RangeError("A plan starts from a level with energies.");
  const next = rest.at(-1) ?? null;
  const plan = (cut: Cut): Plan => ({
    version: 1,
    start: start.id,
    steps: [
      {
        level: next?.id ?? null,
        name: next?.name ?? "next level",
        cut,
        hours: defaultHours(next?.name ?? "", next !== null),
        sigma: START_VALUES.sigma,
      },
    ],
    temperatureK: options.temperatureK,
    truthSigma: next === null ? 0 : START_VALUES.knownSigma,
    failRate: START_VALUES.failRate,
    slots: START_VALUES.slots,
    coresPerSlot: START_VALUES.coresPerSlot,
    draws: drawsOfPlan(options.n),
    seed: PLAN_SEED,
  });
  return {
    version: 1,
    sift: options.sift,
    chosen: 1,
    plans: [
      { name: "Narrow", plan: plan({ by: "share", share: 0.9 }) },
      { name: "Middle", plan: plan({ by: "share", share: 0.95 }) },
      { name: "Wide", plan: plan({ by: "share", share: 0.99 }) },
      { name: "Everything", plan: plan({ by: "all" }) },
    ],
  };
}

/** Draws that a page can wait for: fewer where there are very many conformers. */
export function drawsOfPlan(n: number): number {
  return Math.max(500, Math.min(DRAWS, 2 * Math.floor(2_500_000 / Math.max(1, n) / 2)));
}

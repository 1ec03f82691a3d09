import { defaultHours } from "./hours.ts";
import type { Cut, Plan, PlanSet, PlanStep } from "./plan.ts";

/**
 * Alternatives differ in whom they carry and in nothing else: the same start, steps, hours, errors and machine. Only then
 * do they keep shares of one and the same population, and their costs can be weighed.
 */

/** The cut that a further step starts with: as at the last one, unless that is a window, which holds for its level only. */
export function carriedOn(plan: Plan, otherwise: Cut): Cut {
  const last = plan.steps.at(-1)?.cut;
  return last === undefined || last.by === "window" ? otherwise : last;
}

function withCuts(chain: Plan, cuts: readonly Cut[]): Plan {
  return { ...chain, steps: chain.steps.map((step, s) => ({ ...step, cut: cuts[s] ?? step.cut })) };
}

/** A plan that goes the way of another with its own cuts, at steps that it lacks as it would carry on. */
const along = (chain: Plan, own: Plan): Plan =>
  withCuts(
    chain,
    chain.steps.map(({ cut }, s) => own.steps[s]?.cut ?? carriedOn(own, cut)),
  );

/**
 * The plans of a set on the way of the one at hand.
 *
 * @example alignPlans(set).plans.every(({ plan }) => plan.steps.length === set.plans[set.chosen].plan.steps.length) // true
 */
export function alignPlans(set: PlanSet): PlanSet {
  const chosen = set.plans[set.chosen] === undefined ? 0 : set.chosen;
  const chain = set.plans[chosen]!.plan;
  return {
    ...set,
    chosen,
    plans: set.plans.map((one, k) => (k === chosen ? one : { ...one, plan: along(chain, one.plan) })),
  };
}

/** Another plan at hand, as many steps as before: the others follow in all but their cuts. */
export function withChosen(set: PlanSet, next: Plan): PlanSet {
  return alignPlans({
    ...set,
    plans: set.plans.map((one, k) => (k === set.chosen ? { ...one, plan: next } : one)),
  });
}

/** Steps whose energies are known are counted as if they were computed anew: what the chain costs for a molecule like this. */
export function computedAnew(set: PlanSet): PlanSet {
  const plan = set.plans[set.chosen]?.plan;
  if (plan === undefined) return set;
  const steps = plan.steps.map((step) =>
    step.hours.from === "known" ? { ...step, hours: defaultHours(step.name, false) } : step,
  );
  return withChosen(set, { ...plan, steps });
}

/**
 * One more step in all plans.
 *
 * @param cuts at it by the names of the plans; another plan than the one at hand carries on as before where it has none
 */
export function withStep(
  set: PlanSet,
  at: number,
  step: PlanStep,
  cuts: ReadonlyMap<string, Cut> = new Map(),
): PlanSet {
  const plans = set.plans.map((one, k) => {
    const cut = cuts.get(one.name) ?? (k === set.chosen ? step.cut : carriedOn(one.plan, step.cut));
    return { ...one, plan: { ...one.plan, steps: one.plan.steps.toSpliced(at, 0, { ...step, cut }) } };
  });
  return { ...set, plans };
}

/** All plans without a step. */
export function withoutStep(set: PlanSet, at: number): PlanSet {
  return {
    ...set,
    plans: set.plans.map((one) => ({
      ...one,
      plan: { ...one.plan, steps: one.plan.steps.toSpliced(at, 1) },
    })),
  };
}

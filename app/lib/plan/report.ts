import { evaluatePlan, type PlanData, type PlanOutcome } from "./evaluate.ts";
import { type FrontPoint, planFront } from "./front.ts";
import type { Plan } from "./plan.ts";

/** What becomes of the plan at hand where an error was taken too small. */
export interface ErrorVariant {
  /** The step, from 0, whose error is moved; "truth" for that of the last level. */
  of: number | "truth";
  sigma: number;
  mean: number;
  low: number;
  high: number;
}

export interface PlansReport {
  /** One a plan, in the order given. */
  outcomes: PlanOutcome[];
  front: FrontPoint[] | null;
  variants: ErrorVariant[];
}

/** Draws of a variant: a sentence needs whole per cent. */
const VARIANT_DRAWS = 2000;
/** How much larger an error is taken to show what hangs on it, kcal/mol. */
const STEP_KCAL = 0.2;

/**
 * Everything that the page shows of plans side by side: outcomes, cheapest windows, and what a larger error would do.
 *
 * @param chosen the plan at hand, by place
 * @param data one a plan: their levels may differ
 * @throws RangeError as `evaluatePlan`
 */
export function planReport(plans: readonly Plan[], chosen: number, data: readonly PlanData[]): PlansReport {
  const outcomes = plans.map((plan, k) => evaluatePlan(plan, data[k]!));
  const plan = plans[chosen]!;
  const own = data[chosen]!;
  // The cuts stay as they are: the question is what they keep if the errors are larger.
  const fixed = fixCuts(plan, outcomes[chosen]!);
  const variants: ErrorVariant[] = [];
  const vary = (of: number | "truth", sigma: number, varied: Plan) => {
    const { kept } = evaluatePlan({ ...varied, draws: Math.min(plan.draws, VARIANT_DRAWS) }, own);
    variants.push({ of, sigma, mean: kept.mean, low: kept.low, high: kept.high });
  };
  for (const [s, step] of plan.steps.entries()) {
    if (own.known[s] !== null) continue;
    const sigma = Number((step.sigma + STEP_KCAL).toFixed(6));
    vary(s, sigma, { ...fixed, steps: fixed.steps.map((one, k) => (k === s ? { ...one, sigma } : one)) });
  }
  const truthSigma = Number((plan.truthSigma + STEP_KCAL).toFixed(6));
  vary("truth", truthSigma, { ...fixed, truthSigma });
  return { outcomes, front: planFront(plan, own), variants };
}

function fixCuts(plan: Plan, outcome: PlanOutcome): Plan {
  return {
    ...plan,
    steps: plan.steps.map((step, s) => {
      const kcal = outcome.steps[s]!.windowKcal;
      return { ...step, cut: kcal === null ? { by: "all" } : { by: "window", kcal } };
    }),
  };
}

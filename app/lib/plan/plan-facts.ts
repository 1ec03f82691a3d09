import type { Plan } from "./plan.ts";

/** What a number drawn from a plan belongs to; it travels into the files of figures. */
export interface PlanFact {
  name: string;
  unit?: string;
  value: string | number;
}

/**
 * Level whose population is kept, errors of the predicted steps and of the last level, draws and seed.
 *
 * @param recipe of the draws that were made
 * @param from first step whose error counts: after known energies the errors before them are gone
 * @example planFacts(plan, "MMFF94", outcome)[0] // { name: "reference", value: "MP2" }
 */
export function planFacts(
  plan: Plan,
  startName: string,
  recipe: { draws: number; seed: number; generator: string },
  from = 0,
): PlanFact[] {
  const last = plan.steps.at(-1)?.name ?? startName;
  const errors = plan.steps.flatMap((step, s): PlanFact[] => {
    if (step.level !== null || s < from) return [];
    const before = plan.steps[s - 1]?.name ?? startName;
    return [
      { name: `error of step ${s + 1}, ${before} to ${step.name}`, unit: "kcal/mol", value: step.sigma },
    ];
  });
  return [
    { name: "reference", value: last },
    ...errors,
    { name: `error of ${last}`, unit: "kcal/mol", value: plan.truthSigma },
    { name: "draws", value: recipe.draws },
    { name: "generator", value: recipe.generator },
    { name: "seed", value: recipe.seed },
  ];
}

/** The first step behind the last known energies. */
export function afterKnown({ steps }: Plan): number {
  return steps.findLastIndex(({ level }) => level !== null) + 1;
}

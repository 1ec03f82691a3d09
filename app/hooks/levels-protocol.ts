import { averageErrorsOf } from "~/lib/averages/property-set";
import type { ComparisonInput } from "~/lib/levels/compare";
import { type ComparisonIntervals, comparisonIntervals } from "~/lib/levels/intervals";
import { type PooledMolecule, pooledWindowInterval } from "~/lib/levels/pooled";
import { type WindowBand, windowBand } from "~/lib/levels/window-band";
import type { PlanData } from "~/lib/plan/evaluate";
import type { Plan } from "~/lib/plan/plan";
import { type PlansReport, planReport } from "~/lib/plan/report";

/** What the page leaves to a thread of its own: figures by chance, which take seconds for large sets. */
export interface LevelTasks {
  intervals: {
    input: { comparison: ComparisonInput; seed: number };
    result: ComparisonIntervals;
  };
  band: { input: Parameters<typeof windowBand>[0]; result: WindowBand };
  pooled: {
    input: { molecules: PooledMolecule[]; options: Parameters<typeof pooledWindowInterval>[1] };
    result: ReturnType<typeof pooledWindowInterval>;
  };
  plans: { input: { plans: Plan[]; chosen: number; data: PlanData[] }; result: PlansReport };
  averages: { input: Parameters<typeof averageErrorsOf>; result: ReturnType<typeof averageErrorsOf> };
}

export type LevelTaskName = keyof LevelTasks;
export type LevelTask = {
  [Name in LevelTaskName]: { name: Name; input: LevelTasks[Name]["input"] };
}[LevelTaskName];

const RUN: { [Name in LevelTaskName]: (input: LevelTasks[Name]["input"]) => LevelTasks[Name]["result"] } = {
  intervals: ({ comparison, seed }) => comparisonIntervals(comparison, { seed }),
  band: windowBand,
  pooled: ({ molecules, options }) => pooledWindowInterval(molecules, options),
  plans: ({ plans, chosen, data }) => planReport(plans, chosen, data),
  averages: (input) => averageErrorsOf(...input),
};

/** Does a task; the same on the thread and in tests. */
export function runLevelTask<Name extends LevelTaskName>(
  name: Name,
  input: LevelTasks[Name]["input"],
): LevelTasks[Name]["result"] {
  return RUN[name](input);
}

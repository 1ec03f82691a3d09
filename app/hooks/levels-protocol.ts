import type { ComparisonInput } from "~/lib/levels/compare";
import { type ComparisonIntervals, comparisonIntervals } from "~/lib/levels/intervals";
import { type WindowBand, windowBand } from "~/lib/levels/window-band";

/** What the page leaves to a thread of its own: figures by chance, which take seconds for large sets. */
export interface LevelTasks {
  intervals: {
    input: { comparison: ComparisonInput; seed: number };
    result: ComparisonIntervals;
  };
  band: { input: Parameters<typeof windowBand>[0]; result: WindowBand };
}

export type LevelTaskName = keyof LevelTasks;
export type LevelTask = {
  [Name in LevelTaskName]: { name: Name; input: LevelTasks[Name]["input"] };
}[LevelTaskName];

const RUN: { [Name in LevelTaskName]: (input: LevelTasks[Name]["input"]) => LevelTasks[Name]["result"] } = {
  intervals: ({ comparison, seed }) => comparisonIntervals(comparison, { seed }),
  band: windowBand,
};

/** Does a task; the same on the thread and in tests. */
export function runLevelTask<Name extends LevelTaskName>(
  name: Name,
  input: LevelTasks[Name]["input"],
): LevelTasks[Name]["result"] {
  return RUN[name](input);
}

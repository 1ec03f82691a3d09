import { useMemo } from "react";
import type { LevelData } from "~/components/levels/use-comparison";
import { useLevelTask } from "~/hooks/use-level-task";
import type { Member } from "~/lib/levels/level-energies";
import type { WindowBand } from "~/lib/levels/window-band";
import type { PlanData } from "~/lib/plan/evaluate";
import type { Plan, PlanSet } from "~/lib/plan/plan";
import type { PlansReport } from "~/lib/plan/report";

export interface PlanFigures {
  /** Conformers that have all energies that the plans use; the others are left out, and counted. */
  members: readonly Member[];
  left: number;
  report: PlansReport | null;
  /** What the first window keeps of the final population. */
  band: WindowBand | null;
}

/** Works out plans side by side on a thread of its own. */
export function usePlanReport(
  set: PlanSet,
  levels: readonly LevelData[],
  members: readonly Member[],
  atoms: number,
): PlanFigures {
  const used = useMemo(() => membersOf(set, levels, members), [set, levels, members]);
  const data = useMemo(
    () => (used.length === 0 ? null : set.plans.map(({ plan }) => dataOf(plan, levels, used, atoms))),
    [set, levels, used, atoms],
  );
  const report = useLevelTask(
    "plans",
    useMemo(
      () => (data ? { plans: set.plans.map(({ plan }) => plan), chosen: set.chosen, data } : null),
      [data, set],
    ),
  );
  const chosen = set.plans[set.chosen]?.plan;
  const own = data?.[set.chosen];
  const band = useLevelTask(
    "band",
    useMemo(() => (chosen && own ? bandInput(chosen, own) : null), [chosen, own]),
  );
  return { members: used, left: members.length - used.length, report, band };
}

/** Those that have the energies of every level that a plan takes from the ensemble. */
function membersOf(set: PlanSet, levels: readonly LevelData[], members: readonly Member[]): Member[] {
  const ids = new Set(set.plans.flatMap(({ plan }) => [plan.start, ...plan.steps.map((step) => step.level)]));
  const needed = levels.filter((level) => ids.has(level.id));
  return members.filter(({ frame }) => needed.every(({ energies }) => energies.present[frame - 1] === 1));
}

function dataOf(
  plan: Plan,
  levels: readonly LevelData[],
  members: readonly Member[],
  atoms: number,
): PlanData {
  const at = (id: string | null) => {
    const level = levels.find((one) => one.id === id);
    return level ? Float64Array.from(members, ({ frame }) => level.energies.values[frame - 1] ?? 0) : null;
  };
  return {
    start: at(plan.start) ?? new Float64Array(members.length),
    known: plan.steps.map((step) => at(step.level)),
    weights: Float64Array.from(members, ({ weight }) => weight),
    atoms,
  };
}

/** Final energies as the draws of the plan make them: the last known ones, with the errors of all that follows. */
function bandInput(plan: Plan, data: PlanData) {
  let reference: ArrayLike<number> = data.start;
  let variance = plan.truthSigma ** 2;
  for (const [s, known] of data.known.entries()) {
    if (known === null) continue;
    reference = known;
    variance = plan.truthSigma ** 2;
    for (const later of plan.steps.slice(s + 1)) if (later.level === null) variance += later.sigma ** 2;
  }
  if (data.known.every((known) => known === null)) {
    for (const step of plan.steps) variance += step.sigma ** 2;
  }
  return {
    level: data.start,
    reference,
    weights: data.weights,
    temperatureK: plan.temperatureK,
    error: { sigma: Math.sqrt(variance) },
    draws: plan.draws,
    seed: plan.seed,
  };
}

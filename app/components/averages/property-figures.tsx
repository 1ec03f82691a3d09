import { useMemo } from "react";
import { useWorkbench } from "~/components/workbench/workbench-context";
import type { Contribution } from "~/lib/averages/contributions";
import { ContributionChart } from "./contribution-chart";
import type { Averaged, AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";
import { ValueDistribution } from "./value-distribution";

/** What makes an average and where its values lie; a conformer chosen in one figure is chosen everywhere. */
export function PropertyFigures({
  one,
  averaged,
  weighed,
  list,
  className,
}: {
  one: AveragedProperty;
  averaged: Averaged;
  weighed: WeighedConformers;
  list: readonly Contribution[];
  className: string;
}) {
  const { selected, select, rows } = useWorkbench();
  const chosen = useMemo(() => new Set(selected), [selected]);
  const order = useMemo(() => rows.map((row) => row.frame), [rows]);
  return (
    <div className={`grid gap-x-10 gap-y-8 ${className}`}>
      <ContributionChart
        averaged={one}
        list={list}
        weighed={weighed}
        selected={chosen}
        onChoose={(frame) => select(frame, "only", order)}
      />
      <ValueDistribution
        averaged={one}
        weighed={weighed}
        populations={averaged.populations}
        onChoose={(frame, keys) =>
          select(frame, keys.shiftKey ? "extend" : keys.ctrlKey || keys.metaKey ? "add" : "only", order)
        }
      />
    </div>
  );
}

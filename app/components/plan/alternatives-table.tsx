import { Download, Plus, X } from "lucide-react";
import { useRef } from "react";
import { saveText } from "~/components/charts/export-figure";
import { ScrollBox } from "~/components/columns/scroll-box";
import { Button, IconButton } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { ABSENT, capital, countWord, formatCount, formatPopulation } from "~/lib/format";
import { alternativesCsv, marginalOf, orderOf } from "~/lib/plan/alternatives-csv";
import { alignPlans } from "~/lib/plan/chain";
import { MAX_ALTERNATIVES, type PlanSet } from "~/lib/plan/plan";
import type { PlansReport } from "~/lib/plan/report";
import { costFigure, formatHours, waitingFigure, windowFigure } from "~/lib/plan/words";

/** A plan that was left out at its old place, whatever was changed meanwhile; not where four others stand. */
function withPlanAt(set: PlanSet, at: number, plan: PlanSet["plans"][number]): PlanSet {
  if (set.plans.length >= MAX_ALTERNATIVES) return set;
  const place = Math.min(at, set.plans.length);
  return alignPlans({
    ...set,
    plans: set.plans.toSpliced(place, 0, plan),
    chosen: set.chosen >= place ? set.chosen + 1 : set.chosen,
  });
}

/** Plans side by side, at most four, by rising share kept; the one at hand is washed in magenta. */
export function AlternativesTable({
  set,
  startName,
  report,
  readOnly,
  onChange,
}: {
  set: PlanSet;
  startName: string;
  report: PlansReport | null;
  readOnly: boolean;
  onChange: (set: PlanSet) => void;
}) {
  const { plans, chosen } = set;
  const outcomes = report?.outcomes ?? null;
  const deepest = plans[chosen]?.plan.steps.length ?? 1;
  // While figures are awaited the columns stay where they were.
  const lastOrder = useRef<number[]>([]);
  if (outcomes) lastOrder.current = orderOf(outcomes);
  const order = lastOrder.current.length === plans.length ? lastOrder.current : plans.map((_, k) => k);
  const marginal = outcomes ? marginalOf(set, outcomes) : [];
  const nameOf = (k: number) => plans[k]?.name ?? "";
  const row = (label: string, unit: string, cell: (k: number) => string) => ({ label, unit, cell });
  const rows = [
    ...Array.from({ length: deepest }, (_, s) => {
      const before = s === 0 ? startName : (plans[chosen]?.plan.steps[s - 1]?.name ?? `level ${s}`);
      const name = plans[chosen]?.plan.steps[s]?.name ?? `level ${s + 1}`;
      return [
        row(`Window at ${before}`, "kcal/mol", (k) => {
          const step = outcomes?.[k]?.steps[s];
          const cut = plans[k]?.plan.steps[s]?.cut;
          if (!step || !cut) return ABSENT;
          return step.windowKcal === null ? "all" : windowFigure(cut, step);
        }),
        row(`To ${name}`, "structures", (k) => {
          const step = outcomes?.[k]?.steps[s];
          return step ? formatCount(Math.round(step.carried.mean)) : ABSENT;
        }),
      ];
    }).flat(),
    row("Cost", "core hours", (k) => {
      const [plan, outcome] = [plans[k]?.plan, outcomes?.[k]];
      return plan && outcome ? costFigure(plan, outcome) : ABSENT;
    }),
    row("Waiting", "hours", (k) => {
      const [plan, outcome] = [plans[k]?.plan, outcomes?.[k]];
      return plan && outcome ? waitingFigure(plan, outcome) : ABSENT;
    }),
    row("Population kept", "%, expected", (k) => formatPopulation(outcomes?.[k]?.kept.mean)),
    row("Population lost", "%, expected", (k) => {
      const kept = outcomes?.[k]?.kept.mean;
      return formatPopulation(kept === undefined ? null : Math.max(0, 1 - kept));
    }),
    row("95 % range of what is kept", "%", (k) => {
      const kept = outcomes?.[k]?.kept;
      return kept ? `${formatPopulation(kept.low)} to ${formatPopulation(kept.high)}` : ABSENT;
    }),
    row("Lowest kept in", "% of the draws", (k) => formatPopulation(outcomes?.[k]?.lowestKept)),
    row("Each percent above the last", "core hours", (k) => {
      const each = marginal[k] ?? null;
      return each === null ? ABSENT : formatHours(each);
    }),
  ];
  const add = () => {
    const own = plans[chosen];
    if (!own) return;
    const name = ["Second", "Third", "Fourth", "Other"].find((one) => plans.every((p) => p.name !== one));
    onChange({ ...set, plans: [...plans, { name: name ?? "Other", plan: own.plan }], chosen: plans.length });
  };
  // The toast may act on plans that were changed after it was shown.
  const latest = useRef({ set, onChange });
  latest.current = { set, onChange };
  const remove = (at: number) => {
    const left = plans.filter((_, k) => k !== at);
    onChange({ ...set, plans: left, chosen: Math.min(chosen > at ? chosen - 1 : chosen, left.length - 1) });
    const gone = plans[at];
    if (!gone) return;
    showToast({
      tone: "done",
      badge: "left out",
      text: `The plan ${gone.name}.`,
      action: { label: "Undo", act: () => latest.current.onChange(withPlanAt(latest.current.set, at, gone)) },
    });
  };
  return (
    <section className="mt-9" aria-labelledby="plan-alternatives">
      <BlockHead
        id="plan-alternatives"
        title={plans.length === 1 ? "One plan" : `${capital(countWord(plans.length))} plans side by side`}
      >
        <Button
          size="sm"
          icon={<Download aria-hidden="true" />}
          disabled={outcomes === null}
          onClick={() => outcomes && saveText("plans.csv", "text/csv", alternativesCsv(set, outcomes))}
        >
          CSV
        </Button>
        {readOnly || plans.length >= MAX_ALTERNATIVES ? null : (
          <Button size="sm" icon={<Plus aria-hidden="true" />} onClick={add}>
            Compare another
          </Button>
        )}
      </BlockHead>
      <ScrollBox label="Plans side by side" className="relative">
        <Table aria-labelledby="plan-alternatives">
          <thead>
            <tr>
              <Th>
                <span className="sr-only">Figure</span>
              </Th>
              {order.map((k) => (
                <Th
                  key={k}
                  align="right"
                  className={`max-sm:px-1 ${k === chosen ? "border-t-3! border-t-mark! bg-mark-wash text-ink!" : ""}`}
                >
                  <span className="inline-flex items-center gap-1 max-sm:flex-col max-sm:items-end">
                    {nameOf(k)}
                    {readOnly || plans.length === 1 ? null : (
                      <IconButton label={`Leave out ${nameOf(k)}`} onClick={() => remove(k)}>
                        <X aria-hidden="true" />
                      </IconButton>
                    )}
                  </span>
                  <span className="block font-normal">
                    {k === chosen ? (
                      <span className="inline-flex min-h-6 items-center">this plan</span>
                    ) : (
                      <TextButton
                        className="inline-flex min-h-6 min-w-6 items-center pointer-coarse:min-h-11"
                        onClick={() => onChange({ ...set, chosen: k })}
                      >
                        Take<span className="sr-only"> {nameOf(k)}</span>
                      </TextButton>
                    )}
                  </span>
                </Th>
              ))}
            </tr>
          </thead>
          <tbody>
            {rows.map(({ label, unit, cell }) => (
              <tr key={label} className="border-b border-rule">
                <Td wrap className="max-sm:px-1">
                  {label} <span className="text-ink-3">{unit}</span>
                </Td>
                {order.map((k) => (
                  <Td
                    key={k}
                    align="right"
                    wrap
                    className={`max-sm:px-1 sm:whitespace-nowrap ${k === chosen ? "bg-mark-wash" : ""}`}
                  >
                    {cell(k)}
                  </Td>
                ))}
              </tr>
            ))}
          </tbody>
        </Table>
      </ScrollBox>
    </section>
  );
}

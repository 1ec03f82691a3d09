import { useMemo } from "react";
import { href } from "react-router";
import { FigureFacts } from "~/components/charts/figure-facts";
import { LevelsTabs } from "~/components/levels/levels-tabs";
import { type LevelData, useLevelData, useMembers } from "~/components/levels/use-comparison";
import { Badge } from "~/components/ui/badge";
import { Button } from "~/components/ui/button";
import { CopyButton } from "~/components/ui/copy-button";
import { BlockHead, Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Skeleton } from "~/components/ui/skeleton";
import { StatePanel } from "~/components/ui/state-panel";
import { TextButton, TextLink } from "~/components/ui/text-link";
import { showToast } from "~/components/ui/toast";
import { RemovedList } from "~/components/workbench/removed-list";
import { TemperatureNote } from "~/components/workbench/temperature-note";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { plural } from "~/lib/format";
import { chooseLevels } from "~/lib/levels/better-level";
import type { LevelEnergiesView, Member } from "~/lib/levels/level-energies";
import { alignPlans, computedAnew, withChosen } from "~/lib/plan/chain";
import type { Plan, PlanSet } from "~/lib/plan/plan";
import { afterKnown, planFacts } from "~/lib/plan/plan-facts";
import { firstPlans } from "~/lib/plan/start";
import { hoursOpen, planAssumptions, planFinding, planText, windowFigure } from "~/lib/plan/words";
import type { RemovedPlan, SavedPlans } from "~/services/plans/list-plans.server";
import { AlternativesTable } from "./alternatives-table";
import { CostChart } from "./cost-chart";
import { FirstWindowChart } from "./first-window-chart";
import { PlanSettings } from "./plan-settings";
import { SavePlan } from "./save-plan";
import { StepsTable } from "./steps-table";
import { usePlanDraft } from "./use-plan-draft";
import { type PlanFigures, usePlanReport } from "./use-plan-report";

/** Plan: which conformers to carry through which levels, what it costs, and what it keeps. */
export function PlanSection({
  energies,
  saved,
  removed,
}: {
  energies: readonly LevelEnergiesView[];
  saved: readonly SavedPlans[];
  removed: readonly RemovedPlan[];
}) {
  const levels = useLevelData(energies);
  const { state } = useWorkbench();
  const { members } = useMembers(levels[0] ?? null);
  const { level, reference } = chooseLevels(levels, state.compare);
  return (
    <section aria-labelledby="section-title">
      <SectionHead id="section-title" title="Levels: plan" aside={<LevelsTabs here="plan" />} />
      {level === null || members.length === 0 ? (
        <StatePanel title="A plan starts from energies" className="mt-6">
          <p>
            {members.length === 0
              ? "No frame is accepted yet: intake says why."
              : "These frames carry no energies. Bring a level first, then plan which conformers go on to the next."}
          </p>
        </StatePanel>
      ) : (
        <Planned {...{ levels, members, saved, removed }} first={reference ? [level, reference] : [level]} />
      )}
    </section>
  );
}

function Planned({
  levels,
  members,
  first,
  saved,
  removed,
}: {
  levels: readonly LevelData[];
  members: readonly Member[];
  /** Levels of a fresh draft. */
  first: readonly LevelData[];
  saved: readonly SavedPlans[];
  removed: readonly RemovedPlan[];
}) {
  const { ensemble, sift, state } = useWorkbench();
  const fresh = () =>
    firstPlans(first, { sift: sift?.id ?? null, temperatureK: state.temperatureK, n: members.length });
  const shownAs = (one: SavedPlans | null) => ({ set: one ? alignPlans(one.plans) : fresh(), open: one });
  const { draft, unsaved, edit: setSet, show } = usePlanDraft(ensemble.id, () => shownAs(saved[0] ?? null));
  const { set, open } = draft;
  const figures = usePlanReport(set, levels, members, ensemble.atoms);
  const readOnly = !ensemble.mayCompute;
  /** Shows another one; what was not saved of this one comes back with the toast. */
  const leaveFor = (one: SavedPlans | null) => {
    const before = draft;
    show(shownAs(one));
    if (!unsaved) return;
    showToast({
      tone: "done",
      badge: "put aside",
      text: `What was not saved of ${before.open === null ? "the draft" : before.open.name}.`,
      action: { label: "Undo", act: () => show(before, true) },
    });
  };
  const plan = set.plans[set.chosen]?.plan ?? set.plans[0]?.plan;
  if (!plan) return null;
  const startLevel = levels.find((one) => one.id === plan.start);
  const start = startLevel?.name ?? "a level that is gone";
  const outcome = figures.report?.outcomes[set.chosen] ?? null;
  const finding = outcome ? planFinding(plan, start, outcome, figures.report?.front ?? null) : null;
  return (
    <>
      {finding ? (
        <Finding more={[finding.second, leftWords(figures)].filter(Boolean).join(" ")}>
          {finding.text}
        </Finding>
      ) : (
        <Finding>
          {figures.members.length === 0
            ? "No conformer has the energies of every level in this plan."
            : `Drawing what ${plural(set.plans.length, "plan")} would keep of ${plural(figures.members.length, "conformer")}.`}
        </Finding>
      )}
      <SavePlan
        ensembleId={ensemble.id}
        set={set}
        open={open}
        saved={saved}
        readOnly={readOnly}
        onOpen={leaveFor}
        onSaved={(one) => show(shownAs(one))}
        onRemoved={() => {
          const [before, edited] = [draft, unsaved];
          show(shownAs(null));
          return () => show(before, edited);
        }}
      />
      {unsaved ? (
        <p className="mt-2 text-xs text-ink-3 print:hidden">
          Not saved yet; kept in this tab.{" "}
          <TextButton onClick={() => leaveFor(saved.find(({ id }) => id === open?.id) ?? null)}>
            {open === null ? "Start anew" : `Back to ${open.name} as saved`}
          </TextButton>
        </p>
      ) : null}
      {startLevel === undefined ? (
        <Note tone="held" className="mt-4">
          The level that this plan started from is gone. Choose another start.
        </Note>
      ) : null}
      {set.sift !== null && sift !== null && set.sift !== sift.id ? (
        <Note tone="held" className="mt-4">
          This plan was saved on another distinct set; its figures are of the one shown now.
        </Note>
      ) : null}
      <TemperatureNote
        levels={levels.filter(
          (one) => one.id === plan.start || plan.steps.some(({ level }) => level === one.id),
        )}
        temperaturesK={[plan.temperatureK]}
      />
      {readOnly ? null : (
        <PlanSettings plan={plan} onChange={(part) => setSet(withChosen(set, { ...plan, ...part }))} />
      )}
      <StepsTable
        set={set}
        plan={plan}
        levels={levels}
        atoms={ensemble.atoms}
        conformers={figures.members.length}
        outcome={outcome}
        readOnly={readOnly}
        onChange={setSet}
      />
      <FigureFacts
        facts={[
          { name: "temperature", unit: "K", value: plan.temperatureK },
          { name: "level", value: start },
        ]}
      >
        <PlanCharts
          {...{ set, figures, readOnly }}
          startName={start}
          ordinal={startLevel?.ordinal ?? 1}
          onChange={setSet}
        />
      </FigureFacts>
      <AlternativesTable
        set={set}
        startName={start}
        report={figures.report}
        readOnly={readOnly}
        onChange={setSet}
      />
      {outcome && figures.report ? (
        <Closing plan={plan} start={start} figures={figures} chosen={set.chosen} atoms={ensemble.atoms} />
      ) : null}
      {readOnly ? null : (
        <RemovedList removed={removed} action={href("/ensembles/:id/plan", { id: ensemble.id })} field="id" />
      )}
    </>
  );
}

function leftWords({ left }: PlanFigures): string {
  return left === 0 ? "" : `${plural(left, "conformer")} without an energy at one of the levels left out.`;
}

function PlanCharts({
  set,
  figures,
  startName,
  ordinal,
  readOnly,
  onChange,
}: {
  readOnly: boolean;
  onChange: (set: PlanSet) => void;
  set: PlanSet;
  figures: PlanFigures;
  startName: string;
  ordinal: number;
}) {
  const plan = set.plans[set.chosen]?.plan;
  const { report, band } = figures;
  const firstStep = report?.outcomes[set.chosen]?.steps[0] ?? null;
  const firstCut = plan?.steps[0]?.cut ?? null;
  if (figures.members.length === 0 || !plan) return null;
  const drawn = report?.outcomes[set.chosen];
  return (
    <div className="mt-9 grid gap-x-10 gap-y-8 xl:grid-cols-2" aria-busy={report === null || band === null}>
      {report === null ? (
        <Skeleton className="h-96 w-full" />
      ) : !hoursOpen(plan) && report.outcomes.some(({ cost }) => cost > 0) ? (
        <FigureFacts facts={drawn ? planFacts(plan, startName, drawn) : []}>
          <CostChart set={set} report={report} />
        </FigureFacts>
      ) : (
        <StatePanel
          title="No cost to draw"
          actions={
            readOnly || hoursOpen(plan) ? undefined : (
              <Button onClick={() => onChange(computedAnew(set))}>Count the hours as if computed anew</Button>
            )
          }
        >
          <p>
            {hoursOpen(plan)
              ? "The core hours of a step are not known."
              : "The energies of these steps are known: nothing is left to compute. Counted as if computed anew, by rules of thumb where the name of a level says its kind of method and until you set your own timings, the chain shows what it costs for a molecule like this."}{" "}
            {hoursOpen(plan) ? "Set them under Each to see what a share of the population costs." : ""}
          </p>
        </StatePanel>
      )}
      {band ? (
        <FigureFacts facts={planFacts(plan, startName, band, afterKnown(plan))}>
          <FirstWindowChart
            band={band}
            windowKcal={firstStep?.windowKcal ?? null}
            figure={firstStep && firstCut ? windowFigure(firstCut, firstStep) : ""}
            startName={startName}
            ordinal={ordinal}
            lastName={plan.steps.at(-1)?.name ?? ""}
          />
        </FigureFacts>
      ) : (
        <Skeleton className="h-96 w-full" />
      )}
    </div>
  );
}

/** What is assumed, and the paragraph for the report. */
function Closing({
  plan,
  start,
  figures,
  chosen,
  atoms,
}: {
  plan: Plan;
  start: string;
  figures: PlanFigures;
  chosen: number;
  atoms: number;
}) {
  const { report, members } = figures;
  const outcome = report?.outcomes[chosen];
  const text = useMemo(
    () => (outcome ? planText(plan, start, outcome, members.length) : ""),
    [plan, start, outcome, members.length],
  );
  if (!report || !outcome) return null;
  return (
    <div className="mt-9 grid gap-x-10 gap-y-8 xl:grid-cols-2">
      <section aria-labelledby="plan-assumed">
        <BlockHead id="plan-assumed" title="What is assumed" />
        <ul className="border-t border-rule-2">
          {planAssumptions(plan, outcome, report, atoms).map(({ origin, what, wrong }) => (
            <li
              key={what}
              className="grid grid-cols-[7rem_1fr] gap-x-4 border-b border-rule py-3 max-sm:grid-cols-1 max-sm:gap-y-2"
            >
              <span>
                <Badge tone={origin === "typed in" ? "ask" : "plain"}>{origin}</Badge>
              </span>
              <p className="figures text-ink-2">
                <b className="font-semibold text-ink">{what}.</b> {wrong}
              </p>
            </li>
          ))}
        </ul>
      </section>
      <section aria-labelledby="plan-report">
        <BlockHead id="plan-report" title="For the report">
          <CopyButton text={text} as="link">
            Copy
          </CopyButton>
        </BlockHead>
        <p className="figures border-t border-rule-2 pt-3 text-ink-2">{text}</p>
        <Note className="mt-4">Best case: no window brings back what the sampler never found.</Note>
        <p className="mt-4 text-xs text-ink-3">
          <TextLink to={`${href("/methods")}#plan`}>How this is computed</TextLink>
        </p>
      </section>
    </div>
  );
}

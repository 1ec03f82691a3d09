import { Download, Plus, X } from "lucide-react";
import { useRef } from "react";
import { saveText } from "~/components/charts/export-figure";
import type { LevelData } from "~/components/levels/use-comparison";
import { Button, IconButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { BlockHead } from "~/components/ui/finding";
import { LevelMarker } from "~/components/ui/level-marker";
import { NumberField } from "~/components/ui/number-field";
import { SelectField } from "~/components/ui/select-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { showToast } from "~/components/ui/toast";
import {
  ABSENT,
  formatCount,
  formatEnergy,
  formatPercent,
  formatPopulation,
  formatWindowAsSet,
  plural,
  trimmed,
  windowToCarry,
  withUnit,
} from "~/lib/format";
import { carriedOn, withChosen, withoutStep, withStep } from "~/lib/plan/chain";
import type { PlanOutcome, StepOutcome } from "~/lib/plan/evaluate";
import { defaultHours } from "~/lib/plan/hours";
import { type Cut, MAX_STEPS, type Plan, type PlanSet, type PlanStep } from "~/lib/plan/plan";
import { costFigure, formatHours, planCsv, waitingFigure, windowFigure } from "~/lib/plan/words";
import { HoursDialog } from "./hours-dialog";

const BAR_PX = 120;

/** The chain of levels in order of work: who is carried, what it costs, what is kept. */
export function StepsTable({
  set,
  plan,
  levels,
  atoms,
  conformers,
  outcome,
  readOnly,
  onChange,
}: {
  /** All plans go through the same steps: one that is added or removed is so in all of them. */
  set: PlanSet;
  /** The one at hand. */
  plan: Plan;
  levels: readonly LevelData[];
  atoms: number;
  conformers: number;
  outcome: PlanOutcome | null;
  readOnly: boolean;
  onChange: (set: PlanSet) => void;
}) {
  const start = levels.find((level) => level.id === plan.start);
  const most = Math.max(1e-12, ...(outcome?.steps.map((step) => step.cost) ?? []));
  const setStep = (at: number, part: Partial<PlanStep>) =>
    onChange(
      withChosen(set, {
        ...plan,
        steps: plan.steps.map((step, k) => (k === at ? { ...step, ...part } : step)),
      }),
    );
  // The toast may act on plans that were changed after it was shown.
  const latest = useRef({ set, plan, onChange });
  latest.current = { set, plan, onChange };
  const remove = (at: number) => {
    const gone = plan.steps[at];
    onChange(withoutStep(set, at));
    if (!gone) return;
    const cuts = new Map(
      set.plans.flatMap(({ name, plan: one }): [string, Cut][] => {
        const step = one.steps[at];
        return step ? [[name, step.cut]] : [];
      }),
    );
    const back = () => {
      const { set: now, plan: shown, onChange: change } = latest.current;
      if (shown.steps.length < MAX_STEPS) change(withStep(now, at, gone, cuts));
    };
    showToast({
      tone: "done",
      badge: "removed",
      text: `The step to ${gone.name}.`,
      action: { label: "Undo", act: back },
    });
  };
  return (
    <section className="mt-9" aria-labelledby="plan-steps">
      <BlockHead id="plan-steps" title="Steps">
        {readOnly || plan.steps.length >= MAX_STEPS ? null : (
          <Button
            size="sm"
            icon={<Plus aria-hidden="true" />}
            onClick={() => onChange(withStep(set, plan.steps.length, nextStep(plan)))}
          >
            Step
          </Button>
        )}
        <Button
          size="sm"
          icon={<Download aria-hidden="true" />}
          disabled={outcome === null}
          onClick={() =>
            outcome && saveText("plan.csv", "text/csv", planCsv(plan, start?.name ?? "start", outcome))
          }
        >
          CSV
        </Button>
      </BlockHead>
      <Table aria-labelledby="plan-steps">
        <thead>
          <tr>
            <Th>Level</Th>
            <Th align="right" className="max-xl:hidden">
              In
            </Th>
            <Th className="max-sm:hidden">Carry</Th>
            <Th align="right">Carried</Th>
            <Th align="right" unit="core hours" className="max-xl:whitespace-normal max-sm:hidden">
              Each
            </Th>
            <Th unit="core hours" className="max-xl:whitespace-normal max-sm:hidden">
              Cost
            </Th>
            <Th align="right" unit="%">
              Kept
            </Th>
          </tr>
        </thead>
        <tbody>
          <Tr>
            <Td wrap>
              <span className="flex items-center gap-2">
                <LevelMarker ordinal={start?.ordinal ?? 1} />
                {readOnly || levels.length < 2 ? (
                  (start?.name ?? "start")
                ) : (
                  <SelectField
                    label="Start"
                    hideLabel
                    className="w-40 min-w-0 max-xl:w-34"
                    value={plan.start}
                    onChange={(event) =>
                      onChange(withChosen(set, { ...plan, start: event.currentTarget.value }))
                    }
                    choices={levels.map(({ id, name }) => ({ value: id, label: name }))}
                  />
                )}
              </span>
              <span className="block text-xs text-ink-3">done: {plural(conformers, "conformer")}</span>
            </Td>
            <Td className="max-xl:hidden" />
            <Td className="text-ink-3 max-sm:hidden">all</Td>
            <Td align="right">{formatCount(conformers)}</Td>
            <Td align="right" className="text-ink-3 max-sm:hidden">
              {ABSENT}
            </Td>
            <Td className="text-ink-3 max-sm:hidden">done</Td>
            <Td align="right">100.0</Td>
          </Tr>
          {plan.steps.map((step, s) => (
            <StepRow
              key={s}
              {...{ step, levels, atoms, readOnly, most }}
              outcome={outcome?.steps[s] ?? null}
              onChange={(part) => setStep(s, part)}
              onRemove={plan.steps.length > 1 ? () => remove(s) : undefined}
            />
          ))}
          <tr className="border-b border-rule-2">
            <Td wrap>
              Together
              <span className="block text-xs text-ink-3">
                {outcome ? waitingWords(waitingFigure(plan, outcome)) : "on "}
                {plural(plan.slots, "slot")} of {plural(plan.coresPerSlot, "core")},{" "}
                {formatPercent(plan.failRate)} repeated
                <span className="sm:hidden">
                  {outcome ? `; ${withUnit(costFigure(plan, outcome), "core hours")}` : ""}
                </span>
              </span>
            </Td>
            <Td className="max-xl:hidden" />
            <Td className="max-sm:hidden" />
            <Td />
            <Td className="max-sm:hidden" />
            <Td wrap className="max-sm:hidden">
              <b>{outcome ? costFigure(plan, outcome) : ABSENT}</b>
            </Td>
            <Td align="right" wrap>
              {outcome ? (
                <>
                  <span className="whitespace-nowrap">{formatPopulation(outcome.kept.low)} to</span>{" "}
                  {formatPopulation(outcome.kept.high)}
                </>
              ) : (
                ABSENT
              )}
            </Td>
          </tr>
        </tbody>
      </Table>
    </section>
  );
}

const waitingWords = (figure: string) =>
  figure === "not known" ? "waiting not known, on " : `${withUnit(figure, "hours")} of waiting on `;

function nextStep(plan: Plan): PlanStep {
  return {
    level: null,
    name: "next level",
    cut: carriedOn(plan, { by: "share", share: 0.95 }),
    hours: defaultHours("next level", false),
    sigma: 0.3,
  };
}

/** Another name: hours that only followed from the old one follow the new one. */
function renamed(step: PlanStep, name: string): Partial<PlanStep> {
  const followed = JSON.stringify(step.hours) === JSON.stringify(defaultHours(step.name, false));
  return followed ? { name, hours: defaultHours(name, false) } : { name };
}

function StepRow({
  step,
  levels,
  atoms,
  outcome,
  readOnly,
  most,
  onChange,
  onRemove,
}: {
  step: PlanStep;
  levels: readonly LevelData[];
  atoms: number;
  outcome: StepOutcome | null;
  readOnly: boolean;
  most: number;
  onChange: (part: Partial<PlanStep>) => void;
  onRemove?: () => void;
}) {
  const known = levels.find((level) => level.id === step.level) ?? null;
  const open = step.hours.from === "unknown";
  return (
    <Tr>
      <Td wrap>
        <span className="flex items-center gap-2">
          {known ? <LevelMarker ordinal={known.ordinal} /> : null}
          {readOnly ? (
            step.name
          ) : (
            <SelectField
              label="Level"
              hideLabel
              className="w-40 min-w-0 max-xl:w-34"
              value={known?.id ?? ""}
              onChange={(event) => {
                const level = levels.find((one) => one.id === event.currentTarget.value);
                const name = level?.name ?? "next level";
                onChange({ level: level?.id ?? null, name, hours: defaultHours(name, level !== undefined) });
              }}
              choices={[
                ...levels.map(({ id, name }) => ({ value: id, label: name })),
                { value: "", label: "Another level, predicted" },
              ]}
            />
          )}
          {onRemove && !readOnly ? (
            <IconButton label={`Remove ${step.name}`} onClick={onRemove}>
              <X aria-hidden="true" />
            </IconButton>
          ) : null}
        </span>
        {known ? (
          <span className="block text-xs text-ink-3">
            {step.hours.from === "known" ? "energies known" : "energies known, costed as if they were not"}
          </span>
        ) : (
          <span className="mt-2 grid gap-2">
            {readOnly ? null : (
              <TextField
                label="Name of the level"
                value={step.name}
                maxLength={120}
                onChange={(event) => onChange(renamed(step, event.currentTarget.value))}
              />
            )}
            <NumberField
              label="Error against the level before"
              value={step.sigma}
              min={0}
              max={20}
              step={0.1}
              unit="kcal/mol"
              disabled={readOnly}
              write={formatEnergy}
              wrong="An error lies between 0 and 20 kcal/mol, for example 0.30."
              onCommit={(sigma) => onChange({ sigma: sigma ?? 0 })}
            />
          </span>
        )}
        <span className="mt-2 block sm:hidden">
          <CutFields
            cut={step.cut}
            outcome={outcome}
            readOnly={readOnly}
            onChange={(cut) => onChange({ cut })}
          />
          <span className="mt-2 block text-xs text-ink-3">
            <HoursDialog
              name={step.name}
              source={step.hours}
              known={known !== null}
              atoms={atoms}
              readOnly={readOnly}
              onChange={(hours) => onChange({ hours })}
            />{" "}
            core hours each{outcome && !open ? `, ${formatHours(outcome.cost)} together` : ""}
          </span>
        </span>
      </Td>
      <Td align="right" className="max-xl:hidden">
        {outcome ? formatCount(Math.round(outcome.in.mean)) : ABSENT}
      </Td>
      <Td wrap className="max-sm:hidden">
        <CutFields
          cut={step.cut}
          outcome={outcome}
          readOnly={readOnly}
          onChange={(cut) => onChange({ cut })}
        />
      </Td>
      <Td align="right">{carriedWords(outcome)}</Td>
      <Td align="right" wrap className="max-sm:hidden">
        <HoursDialog
          name={step.name}
          source={step.hours}
          known={known !== null}
          atoms={atoms}
          readOnly={readOnly}
          onChange={(hours) => onChange({ hours })}
        />
      </Td>
      <Td className="max-sm:hidden">
        <span className="flex items-center gap-3">
          <span className="w-14 text-right max-xl:w-auto">
            {outcome && !open ? formatHours(outcome.cost) : ABSENT}
          </span>
          {outcome && outcome.cost > 0 ? (
            <svg width={BAR_PX} height="12" aria-hidden="true" className="max-xl:hidden">
              <rect
                x="0.5"
                y="2"
                width={Math.max(1, (BAR_PX - 2) * (outcome.cost / most))}
                height="8"
                fill="none"
                className="stroke-ink-3"
              />
            </svg>
          ) : null}
        </span>
      </Td>
      <Td align="right">{outcome ? formatPopulation(outcome.kept.mean) : ABSENT}</Td>
    </Tr>
  );
}

/** The number carried, with its range where the draws differ. */
function carriedWords(outcome: StepOutcome | null) {
  if (!outcome) return ABSENT;
  const { mean, low, high } = outcome.carried;
  return (
    <>
      {formatCount(Math.round(mean))}
      {high > low ? (
        <span className="block text-xs text-ink-3">
          {formatCount(Math.round(low))} to {formatCount(Math.round(high))}
        </span>
      ) : null}
    </>
  );
}

/** A window, a share of the final population, or all; a share says which window it takes. */
function CutFields({
  cut,
  outcome,
  readOnly,
  onChange,
}: {
  cut: Cut;
  outcome: StepOutcome | null;
  readOnly: boolean;
  onChange: (cut: Cut) => void;
}) {
  const window = outcome?.windowKcal ?? null;
  const takes =
    cut.by === "share" ? (
      <span className="block text-xs text-ink-3">
        {outcome === null || window === null
          ? "window follows"
          : withUnit(windowFigure(cut, outcome), "kcal/mol")}
      </span>
    ) : null;
  if (readOnly) {
    if (cut.by === "all") return "all";
    return (
      <>
        {cut.by === "window"
          ? withUnit(formatWindowAsSet(cut.kcal), "kcal/mol")
          : withUnit(trimmed(100 * cut.share, 2), "%")}
        {takes}
      </>
    );
  }
  return (
    <span className="flex flex-wrap gap-2">
      <SelectField
        label="Carry by"
        hideLabel
        className="w-28"
        value={cut.by}
        onChange={(event) => onChange(switchCut(event.currentTarget.value, outcome))}
        choices={[
          { value: "window", label: "Window" },
          { value: "share", label: "Share" },
          { value: "all", label: "All" },
        ]}
      />
      {cut.by === "window" ? (
        <NumberField
          label="Window"
          hideLabel
          className="w-32 text-mark"
          value={cut.kcal}
          min={0}
          max={1000}
          step={0.1}
          unit="kcal/mol"
          write={formatWindowAsSet}
          wrong="A window lies between 0 and 1,000 kcal/mol."
          onCommit={(kcal) => onChange({ by: "window", kcal: kcal ?? 0 })}
        />
      ) : cut.by === "share" ? (
        <NumberField
          label="Share to keep"
          hideLabel
          className="w-32 text-mark"
          value={100 * cut.share}
          min={0}
          max={100}
          above
          step={1}
          unit="%"
          write={(value) => trimmed(value, 2)}
          wrong="A share lies above 0 and up to 100 %."
          onCommit={(share) => onChange({ by: "share", share: Number(((share ?? 95) / 100).toFixed(11)) })}
        />
      ) : null}
      {takes}
    </span>
  );
}

function switchCut(by: string, outcome: StepOutcome | null): Cut {
  if (by === "window") {
    // Rounded up, as it was printed beside the share: the numbers carried and kept stay what they were.
    const window = outcome?.windowKcal ?? null;
    return { by: "window", kcal: window === null ? 3 : windowToCarry(window, outcome?.nextKcal) };
  }
  return by === "share" ? { by: "share", share: 0.95 } : { by: "all" };
}

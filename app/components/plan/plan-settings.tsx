import { NumberField } from "~/components/ui/number-field";
import { SettingsStrip } from "~/components/workbench/settings-strip";
import { formatCount, formatEnergy, formatTemperature, trimmed, withUnit } from "~/lib/format";
import type { Plan } from "~/lib/plan/plan";

/** What holds for the whole plan: temperature, error of the last level, repeats, slots, cores. */
export function PlanSettings({ plan, onChange }: { plan: Plan; onChange: (part: Partial<Plan>) => void }) {
  const last = plan.steps.at(-1)?.name ?? "";
  return (
    <SettingsStrip
      columns="grid-cols-2 xl:grid-cols-5"
      words={`${withUnit(formatTemperature(plan.temperatureK), "K")}, error of the last level ${withUnit(formatEnergy(plan.truthSigma), "kcal/mol")}, ${withUnit(trimmed(100 * plan.failRate, 2), "%")} of the jobs repeated, ${formatCount(plan.slots)} slots of ${formatCount(plan.coresPerSlot)} cores.`}
    >
      <NumberField
        label="Temperature"
        value={plan.temperatureK}
        min={1}
        max={100_000}
        step={1}
        unit="K"
        write={formatTemperature}
        wrong="A temperature above 0 K, for example 298.15."
        onCommit={(value) => onChange({ temperatureK: value ?? plan.temperatureK })}
      />
      <NumberField
        label={`Error of ${last}`}
        value={plan.truthSigma}
        min={0}
        max={20}
        step={0.1}
        unit="kcal/mol"
        write={formatEnergy}
        wrong="An error lies between 0 and 20 kcal/mol; 0 takes the last level as the truth."
        onCommit={(value) => onChange({ truthSigma: value ?? 0 })}
      />
      <NumberField
        label="Jobs repeated"
        value={100 * plan.failRate}
        min={0}
        max={1000}
        step={1}
        unit="%"
        write={(value) => trimmed(value, 2)}
        wrong="A share of 0 % or more, for example 4."
        onCommit={(value) => onChange({ failRate: Number(((value ?? 0) / 100).toFixed(8)) })}
      />
      <NumberField
        label="Slots"
        value={plan.slots}
        min={1}
        max={100_000}
        step={1}
        write={formatCount}
        wrong="How many jobs run at the same time: a whole number from 1."
        onCommit={(value) => onChange({ slots: Math.max(1, Math.round(value ?? 1)) })}
      />
      <NumberField
        label="Cores a slot"
        value={plan.coresPerSlot}
        min={1}
        max={10_000}
        step={1}
        write={formatCount}
        wrong="How many cores a job has: a whole number from 1."
        onCommit={(value) => onChange({ coresPerSlot: Math.max(1, Math.round(value ?? 1)) })}
      />
    </SettingsStrip>
  );
}

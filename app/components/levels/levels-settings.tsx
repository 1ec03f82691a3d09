import { ArrowLeftRight } from "lucide-react";
import { Button } from "~/components/ui/button";
import { LevelSelect } from "~/components/ui/level-marker";
import { NumberField } from "~/components/ui/number-field";
import { SelectField } from "~/components/ui/select-field";
import { SliderField } from "~/components/ui/slider-field";
import { SettingsStrip } from "~/components/workbench/settings-strip";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { formatEnergy, formatTemperature, plural, trimmed, withUnit } from "~/lib/format";
import { type CompareState, MAX_SIGMA_KCAL, TEMPERATURE_RANGE_K, type ZeroChoice } from "~/lib/url-state";
import { ZERO_WORDS } from "./agreement-table";
import type { Comparison, LevelData } from "./use-comparison";

/** Level, reference, zero in the open, temperature, what is compared, share to keep and the reference's own error. */
export function LevelsSettings({
  levels,
  level,
  reference,
  found,
}: {
  levels: readonly LevelData[];
  level: LevelData;
  reference: LevelData;
  found: Comparison | null;
}) {
  const { state, change, temperatureK, slideTemperature, setTemperature, result, ensemble } = useWorkbench();
  const { compare } = state;
  const set = (part: Partial<CompareState>, gradual = false) =>
    change({ compare: { ...compare, ...part } }, { gradual });
  const choose = (part: { level?: string; reference?: string }) => {
    const next = { level: level.id, reference: reference.id, ...part };
    // A level is not compared with itself: choosing it on one side moves the other.
    if (next.level === next.reference) {
      if (part.level) next.reference = level.id;
      else next.level = reference.id;
    }
    return set({ ...next, zeroFrame: null });
  };
  const zeroAt = found && found.zeroPlace !== null ? found.paired.members[found.zeroPlace]?.name : undefined;
  const words = [
    `${level.name} against ${reference.name}`,
    `zero at ${ZERO_WORDS[compare.zero]}${zeroAt ? ` (${zeroAt})` : ""}`,
    withUnit(formatTemperature(temperatureK), "K"),
    compare.among === "conformers" && result ? "the conformers of the distinct set" : "all accepted frames",
    `share to keep ${withUnit(trimmed(100 * compare.share, 2), "%")}`,
    `error of the reference ${withUnit(formatEnergy(compare.sigmaKcal), "kcal/mol")}`,
  ];
  return (
    <SettingsStrip
      words={`${words.join(", ")}.`}
      columns="grid-cols-2 xl:grid-cols-[minmax(0,1fr)_minmax(0,1fr)_minmax(0,1fr)_minmax(0,1fr)]"
    >
      <div className="col-span-2 grid grid-cols-[minmax(0,1fr)_auto_minmax(0,1fr)] items-end gap-x-3 gap-y-4 max-sm:grid-cols-1">
        <LevelSelect
          label="Level"
          levels={levels}
          value={level.id}
          onChange={(id) => choose({ level: id })}
        />
        <Button
          icon={<ArrowLeftRight aria-hidden="true" />}
          title="Judges the reference by the level"
          // The same two, and the common conformer is one of both: all else stays as it is set.
          onClick={() => set({ level: reference.id, reference: level.id })}
        >
          Swap
          <span className="sr-only"> level and reference</span>
        </Button>
        <LevelSelect
          label="Reference"
          levels={levels}
          value={reference.id}
          onChange={(id) => choose({ reference: id })}
        />
      </div>
      <SelectField
        label="Zero of energy"
        value={compare.zero}
        onChange={(event) => set({ zero: event.currentTarget.value as ZeroChoice, zeroFrame: null })}
        choices={[
          { value: "least-squares", label: "Mean of the matched" },
          { value: "own-minimum", label: "Each level's lowest" },
          { value: "common", label: "One common conformer" },
          { value: "median", label: "Median of the matched" },
        ]}
      />
      {compare.zero === "common" && found ? (
        <SelectField
          label="Common conformer"
          value={String(compare.zeroFrame ?? "")}
          onChange={(event) => set({ zeroFrame: Number(event.currentTarget.value) || null })}
          choices={[
            { value: "", label: `Lowest at ${reference.name}` },
            ...found.paired.members
              .slice(0, 200)
              .map(({ frame, name }) => ({ value: String(frame), label: name })),
          ]}
        />
      ) : null}
      <SelectField
        label="Compared"
        value={result ? compare.among : "accepted"}
        disabled={result === null}
        onChange={(event) =>
          set({ among: event.currentTarget.value === "accepted" ? "accepted" : "conformers" })
        }
        choices={[
          ...(result ? [{ value: "conformers", label: `${plural(result.kept.length, "conformer")}` }] : []),
          { value: "accepted", label: plural(ensemble.accepted, "accepted frame") },
        ]}
      />
      <SliderField
        label="Temperature"
        className="max-xl:col-span-2"
        value={temperatureK}
        min={TEMPERATURE_RANGE_K[0]}
        max={TEMPERATURE_RANGE_K[1]}
        step={1}
        unit="K"
        write={formatTemperature}
        wrong={`A temperature from ${TEMPERATURE_RANGE_K[0]} to ${TEMPERATURE_RANGE_K[1]} K, for example 298.15.`}
        onChange={slideTemperature}
        onCommit={setTemperature}
      />
      <NumberField
        label="Share to keep"
        value={100 * compare.share}
        min={0}
        max={100}
        above
        step={1}
        unit="%"
        write={(value) => trimmed(value, 2)}
        wrong="A share lies above 0 and up to 100 %, for example 95."
        onCommit={(value) => set({ share: Number(((value ?? 95) / 100).toFixed(11)) }, true)}
      />
      <NumberField
        label="Error of the reference"
        value={compare.sigmaKcal}
        min={0}
        max={MAX_SIGMA_KCAL}
        step={0.1}
        unit="kcal/mol"
        write={formatEnergy}
        wrong={`An error lies between 0 and ${MAX_SIGMA_KCAL} kcal/mol, for example 0.30; 0 takes the reference as exact.`}
        onCommit={(value) => set({ sigmaKcal: value ?? 0 }, true)}
      />
    </SettingsStrip>
  );
}

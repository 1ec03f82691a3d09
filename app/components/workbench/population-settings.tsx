import { labelClass } from "~/components/ui/field";
import { LevelName } from "~/components/ui/level-marker";
import { NumberField } from "~/components/ui/number-field";
import { SelectField } from "~/components/ui/select-field";
import { SliderField } from "~/components/ui/slider-field";
import { formatEnergy, formatTemperature, withUnit } from "~/lib/format";
import { TEMPERATURE_RANGE_K, type WeightsChoice } from "~/lib/url-state";
import { SettingsStrip } from "./settings-strip";
import { useWorkbench } from "./workbench-context";

/** Level, temperature, window and weights: all answered in the browser, at once. */
export function PopulationSettings() {
  const { level, state, change, temperatureK, slideTemperature, setTemperature, populations } =
    useWorkbench();
  const taken = populations?.weights.kind ?? "copies";
  const settingsWords = `${[
    level ? `Level ${level.name}` : "No level",
    withUnit(formatTemperature(temperatureK), "K"),
    state.windowKcal === null
      ? "no energy window"
      : `energy window ${withUnit(formatEnergy(state.windowKcal), "kcal/mol")}`,
    `weighted by ${taken}`,
  ].join(", ")}.`;
  return (
    <SettingsStrip
      words={settingsWords}
      columns="grid-cols-2 max-[24rem]:grid-cols-1 sm:grid-cols-[minmax(0,1fr)_minmax(0,1fr)] xl:grid-cols-[minmax(8rem,0.8fr)_minmax(0,1.9fr)_9rem_11rem]"
    >
      <div className="min-w-0 max-sm:col-span-full">
        <p className={`mb-2 ${labelClass}`}>Level</p>
        <p className="flex min-h-9 items-center">
          {level ? <LevelName name={level.name} ordinal={level.ordinal} /> : "none"}
        </p>
      </div>
      <SliderField
        label="Temperature"
        className="max-sm:col-span-full"
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
        label="Energy window"
        value={state.windowKcal}
        optional
        placeholder="none"
        min={0}
        max={1000}
        above
        step={0.5}
        unit="kcal/mol"
        write={formatEnergy}
        wrong="A window lies above 0 kcal/mol, for example 3.00; empty for none."
        onCommit={(value) => change({ windowKcal: value }, { gradual: true })}
      />
      <SelectField
        label="Weights"
        value={state.weights}
        onChange={(event) => change({ weights: event.currentTarget.value as WeightsChoice })}
        choices={[
          { value: "auto", label: `Auto: ${state.weights === "auto" ? taken : "by kind"}` },
          { value: "copies", label: "Copies" },
          { value: "degeneracy", label: "Degeneracy" },
        ]}
      />
    </SettingsStrip>
  );
}

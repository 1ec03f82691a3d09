import { Plus, X } from "lucide-react";
import { useState } from "react";
import { IconButton } from "~/components/ui/button";
import { labelClass } from "~/components/ui/field";
import { LevelMarker } from "~/components/ui/level-marker";
import { NumberField } from "~/components/ui/number-field";
import { SelectField } from "~/components/ui/select-field";
import { SettingsStrip } from "~/components/workbench/settings-strip";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { MAX_ERROR_KCAL, MAX_TEMPERATURES, withTemperature } from "~/lib/averages/averages-state";
import { fixed, formatEnergy, formatTemperature } from "~/lib/format";
import { TEMPERATURE_RANGE_K, type WeightsChoice } from "~/lib/url-state";
import type { LevelView } from "~/lib/views";
import { useAveragesState } from "./use-averages-state";
import type { LevelError, WeighedConformers } from "./use-weighed";

/** Levels that can weigh the set: that of the sift, and every other. */
export function LevelChoice({
  weighed,
  levels,
}: {
  weighed: WeighedConformers;
  levels: readonly LevelView[];
}) {
  const [, change] = useAveragesState();
  const { level: own } = useWorkbench();
  return (
    <SelectField
      label="Energies"
      value={weighed.level.id}
      mark={<LevelMarker ordinal={weighed.level.ordinal} />}
      onChange={(event) =>
        change({ by: event.currentTarget.value === own?.id ? null : event.currentTarget.value })
      }
      choices={levels.map((level) => ({ value: level.id, label: level.name }))}
    />
  );
}

/** The error of the level: typed in, or taken from a comparison. */
export function ErrorField({ error }: { error: LevelError }) {
  const [state, change] = useAveragesState();
  return (
    <NumberField
      label="Level error, ±"
      value={error.against ? Number((error.sigma ?? 0).toFixed(2)) : state.sigmaKcal}
      min={0}
      max={MAX_ERROR_KCAL}
      step={0.05}
      unit="kcal/mol"
      write={formatEnergy}
      wrong={`An error of the level from 0 to ${MAX_ERROR_KCAL} kcal/mol, for example 0.50.`}
      help={
        error.against ? `Against ${error.against.name}: standard deviation of the differences.` : undefined
      }
      onCommit={(value) => value !== null && change({ sigmaKcal: value, sigmaFrom: null })}
    />
  );
}

/** Where the error is taken from. */
export function ErrorSource({ error }: { error: LevelError }) {
  const [state, change] = useAveragesState();
  const offer = error.offers[0];
  return (
    <SelectField
      label="Taken from"
      value={state.sigmaFrom ?? ""}
      disabled={error.offers.length === 0}
      onChange={(event) =>
        change(
          event.currentTarget.value === ""
            ? { sigmaFrom: null, sigmaKcal: Number((error.sigma ?? 0.5).toFixed(2)) }
            : { sigmaFrom: event.currentTarget.value },
        )
      }
      choices={[
        {
          value: "",
          label: offer
            ? `Typed in; against ${offer.level.name} it is ${fixed(offer.sd, 2)}`
            : "Typed in; no second level yet",
        },
        ...error.offers.map(({ level, sd, n }) => ({
          value: level.id,
          label: `Against ${level.name}: ${fixed(sd, 2)} (${n} conformers)`,
        })),
      ]}
    />
  );
}

/** Energies, weights, temperatures beside each other, error of the level. */
export function AveragesSettings({ weighed, error }: { weighed: WeighedConformers; error: LevelError }) {
  const { state, change, ensemble, temperatureK } = useWorkbench();
  return (
    <SettingsStrip
      columns="sm:grid-cols-2 xl:grid-cols-[minmax(8rem,0.9fr)_minmax(8rem,1fr)_minmax(14rem,1.6fr)_9rem]"
      words={`Weighed by ${weighed.level.name}, ${formatTemperature(temperatureK)} K, level error ± ${formatEnergy(error.sigma)} kcal/mol.`}
    >
      <LevelChoice weighed={weighed} levels={ensemble.levels} />
      <SelectField
        label="Weights"
        value={state.weights}
        onChange={(event) => change({ weights: event.currentTarget.value as WeightsChoice })}
        choices={[
          { value: "auto", label: `Auto: ${state.weights === "auto" ? weighed.weights.kind : "by kind"}` },
          { value: "copies", label: "Copies" },
          { value: "degeneracy", label: "Degeneracy" },
        ]}
      />
      <TemperatureChips />
      <ErrorField error={error} />
    </SettingsStrip>
  );
}

/** Temperatures shown beside each other; the one set is magenta, a press sets another. */
export function TemperatureChips() {
  const { temperatureK, change } = useWorkbench();
  const [{ temperatures }, changeChips] = useAveragesState();
  const [adding, setAdding] = useState(false);
  const shown = [...new Set([...temperatures, temperatureK])].sort((a, b) => a - b);
  return (
    <div className="min-w-0">
      <p className={`mb-2 ${labelClass}`}>Temperatures, K</p>
      <ul className="flex flex-wrap items-center gap-1">
        {shown.map((kelvin) => {
          const here = kelvin === temperatureK;
          return (
            <li
              key={kelvin}
              className={`inline-flex h-9 items-center rounded-md border bg-sheet pointer-coarse:h-11 ${here ? "border-mark text-mark" : "border-edge"}`}
            >
              <button
                type="button"
                aria-pressed={here}
                className="figures h-full rounded-md px-2 font-medium"
                onClick={() => change({ temperatureK: kelvin })}
              >
                {formatTemperature(kelvin)}
                <span className="sr-only"> K</span>
              </button>
              {here || shown.length < 2 ? null : (
                <IconButton
                  label={`Leave out ${formatTemperature(kelvin)} K`}
                  className="size-6!"
                  onClick={() => changeChips({ temperatures: temperatures.filter((one) => one !== kelvin) })}
                >
                  <X aria-hidden="true" />
                </IconButton>
              )}
            </li>
          );
        })}
        {adding ? (
          <li className="w-28">
            <NumberField
              label="A further temperature"
              hideLabel
              value={null}
              optional
              min={TEMPERATURE_RANGE_K[0]}
              max={TEMPERATURE_RANGE_K[1]}
              unit="K"
              placeholder="310"
              write={formatTemperature}
              wrong={`${TEMPERATURE_RANGE_K[0]} to ${TEMPERATURE_RANGE_K[1]} K, for example 310.`}
              onCommit={(value) => {
                setAdding(false);
                if (value !== null) changeChips({ temperatures: withTemperature(temperatures, value) });
              }}
            />
          </li>
        ) : shown.length < MAX_TEMPERATURES ? (
          <li>
            <IconButton label="Add a temperature" onClick={() => setAdding(true)}>
              <Plus aria-hidden="true" />
            </IconButton>
          </li>
        ) : null}
      </ul>
    </div>
  );
}

import { href, useLocation } from "react-router";
import { SubmitButton } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { SelectField } from "~/components/ui/select-field";
import { fixed, formatEnergy, formatTemperature, readTyped } from "~/lib/format";
import { DEFAULT_RMSD_TOLERANCE, type SiftRequest } from "~/lib/recipe/recipe";
import { TEMPERATURE_RANGE_K } from "~/lib/url-state";
import type { EnsembleView } from "~/lib/views";
import { useWorkbench } from "./workbench-context";

/**
 * The settings as plain forms, for browsers without script: what a slider does at once they do on sending. Nothing of
 * them is there where script runs.
 */

const FORM = "mt-4 flex flex-wrap items-start gap-x-6 gap-y-4 border-y border-rule py-4 print:hidden";

/** Temperature and window: an address with them, which the page reads. */
export function PlainPopulationForm() {
  const { state, temperatureK } = useWorkbench();
  const { search, pathname } = useLocation();
  const params = new URLSearchParams(search);
  const kept = [...params].filter(([name]) => name !== "T" && name !== "w");
  return (
    <noscript>
      <form method="get" action={pathname} className={FORM}>
        {kept.map(([name, value]) => (
          <input key={name} type="hidden" name={name} value={value} />
        ))}
        <TextField
          label="Temperature"
          name="T"
          unit="K"
          inputMode="decimal"
          defaultValue={params.get("T") ?? formatTemperature(temperatureK)}
          error={temperatureFault(params.get("T"))}
        />
        <TextField
          label="Energy window"
          name="w"
          unit="kcal/mol"
          defaultValue={state.windowKcal === null ? "none" : formatEnergy(state.windowKcal)}
          help="none: no window"
        />
        <span className="pt-6">
          <SubmitButton kind="plain">Show the populations</SubmitButton>
        </span>
      </form>
    </noscript>
  );
}

/** What is wrong with a temperature of the address; undefined where nothing is. */
function temperatureFault(text: string | null): string | undefined {
  const [low, high] = TEMPERATURE_RANGE_K;
  const kelvin = text === null ? low : readTyped(text, "K");
  return kelvin !== null && kelvin >= low && kelvin <= high
    ? undefined
    : `A temperature from ${low} to ${high} K, for example 298.15; shown at 298.15 K.`;
}

/** Tolerances and window of the sift: the server sifts, and the page comes back with the set. */
export function PlainSiftForm({ ensemble, request }: { ensemble: EnsembleView; request: SiftRequest }) {
  const { search } = useLocation();
  const level = request.level ?? "";
  const hidden = {
    intent: "sift",
    level,
    mirror: request.mirror ?? "auto",
    chirality: request.chirality ?? "auto",
    symmetry: request.symmetry === false ? "off" : "on",
  };
  const energy = (value: number | null | undefined) =>
    value === null || value === undefined ? "" : formatEnergy(value);
  return (
    <noscript>
      <form
        method="post"
        action={`${href("/ensembles/:id/distinct-set", { id: ensemble.id })}${search}`}
        className={FORM}
      >
        {Object.entries(hidden).map(([name, value]) => (
          <input key={name} type="hidden" name={name} value={value} />
        ))}
        <TextField
          label="RMSD tolerance"
          name="rmsdTolerance"
          unit="Å"
          required
          defaultValue={fixed(request.rmsdTolerance ?? DEFAULT_RMSD_TOLERANCE, 3)}
        />
        {level === "" ? null : (
          <>
            <TextField
              label="Energy tolerance"
              name="energyTolerance"
              unit="kcal/mol"
              defaultValue={energy(request.energyTolerance)}
              help="empty: the RMSD alone decides"
            />
            <TextField
              label="Energy window"
              name="window"
              unit="kcal/mol"
              defaultValue={energy(request.window)}
              help="empty: none"
            />
          </>
        )}
        <SelectField
          label="Atoms compared"
          name="atoms"
          defaultValue={request.atoms ?? "heavy+polarH"}
          choices={[
            { value: "heavy", label: "Heavy" },
            { value: "heavy+polarH", label: "Heavy and polar H" },
            { value: "all", label: "All" },
          ]}
        />
        <span className="pt-6">
          <SubmitButton kind="plain">Sift with these settings</SubmitButton>
        </span>
      </form>
    </noscript>
  );
}

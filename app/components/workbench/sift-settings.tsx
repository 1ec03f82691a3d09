import { useEffect, useRef, useState } from "react";
import { Checkbox } from "~/components/ui/checkbox";
import { LevelSelect } from "~/components/ui/level-marker";
import { BesideField, NumberField } from "~/components/ui/number-field";
import { Segments } from "~/components/ui/segments";
import { SelectField } from "~/components/ui/select-field";
import { SliderField } from "~/components/ui/slider-field";
import { useDebounced } from "~/hooks/use-debounced";
import { fixed, formatEnergy } from "~/lib/format";
import { DEFAULT_ENERGY_TOLERANCE_KCAL, DEFAULT_RMSD_TOLERANCE, type SiftRequest } from "~/lib/recipe/recipe";
import type { EnsembleView } from "~/lib/views";
import { autoMirror } from "~/lib/workbench/recipe-words";
import { SettingsStrip } from "./settings-strip";

/** A pause in dragging this long asks the server. */
const PAUSE_MS = 250;

/** The recipe of the sift. A change asks for another one; what is shown stays until that is there. */
export function SiftSettings({
  ensemble,
  request,
  words,
  onDraft,
  onAsk,
}: {
  ensemble: EnsembleView;
  /** What the sift shown was made with, in words. */
  words: string;
  /** What the sift shown was asked with. */
  request: SiftRequest;
  /** Every change at once, while a thumb is moved too; null when the settings are those of the sift shown again. */
  onDraft: (request: SiftRequest | null) => void;
  /** `settled` is false while a thumb is still held. */
  onAsk: (request: SiftRequest, settled: boolean) => void;
}) {
  const [draft, setDraft] = useState(request);
  const shown = useRef(request);
  // Another sift came on the page: its recipe is the new start.
  useEffect(() => {
    if (shown.current !== request) {
      shown.current = request;
      setDraft(request);
      onDraft(null);
    }
  }, [request, onDraft]);
  const later = useDebounced((next: SiftRequest) => onAsk(next, false), PAUSE_MS);
  const slide = (part: Partial<SiftRequest>) => {
    const next = { ...draft, ...part };
    setDraft(next);
    onDraft(next);
    later(next);
  };
  const set = (part: Partial<SiftRequest>) => {
    const next = { ...draft, ...part };
    setDraft(next);
    onDraft(next);
    later.cancel();
    onAsk(next, true);
  };
  // Who may not compute moves the two tolerances alone, which the browser counts for.
  const locked = !ensemble.mayCompute;
  const chirality =
    draft.chirality === undefined || draft.chirality === "auto"
      ? ensemble.chirality === "achiral"
        ? "achiral"
        : "chiral"
      : draft.chirality;
  const energies = draft.level !== null;
  const tolerance = draft.energyTolerance ?? null;
  const lastTolerance = useRef(tolerance ?? DEFAULT_ENERGY_TOLERANCE_KCAL);
  if (tolerance !== null) lastTolerance.current = tolerance;

  return (
    <BesideField value={JSON.stringify(draft)}>
      <SettingsStrip words={words} columns="sm:grid-cols-2">
        <SliderField
          label="RMSD tolerance"
          value={draft.rmsdTolerance ?? DEFAULT_RMSD_TOLERANCE}
          min={0}
          max={1}
          fieldMax={100}
          step={0.01}
          unit="Å"
          fieldClass="w-32"
          write={(value) => fixed(value, 3)}
          wrong="An RMSD tolerance from 0 to 100 Å, for example 0.200."
          onChange={(value) => slide({ rmsdTolerance: value })}
          onCommit={(value) => set({ rmsdTolerance: value })}
        />
        <div className="min-w-0">
          <SliderField
            label="Energy tolerance"
            value={lastTolerance.current}
            min={0}
            max={1}
            fieldMax={1000}
            step={0.01}
            unit="kcal/mol"
            fieldClass="w-36"
            disabled={!energies || tolerance === null}
            write={formatEnergy}
            wrong="An energy tolerance from 0 kcal/mol, for example 0.15."
            onChange={(value) => slide({ energyTolerance: value })}
            onCommit={(value) => set({ energyTolerance: value })}
          />
          {energies ? (
            <Checkbox
              className="mt-3 text-xs text-ink-2"
              checked={tolerance === null}
              disabled={locked}
              onChange={(event) =>
                set({ energyTolerance: event.currentTarget.checked ? null : lastTolerance.current })
              }
            >
              None: the RMSD alone decides
            </Checkbox>
          ) : null}
        </div>
        <Segments
          label="Atoms compared"
          value={draft.atoms ?? "heavy+polarH"}
          disabled={locked}
          options={[
            { value: "heavy", label: "Heavy" },
            { value: "heavy+polarH", label: "Heavy and polar H" },
            { value: "all", label: "All" },
          ]}
          onChange={(atoms) => set({ atoms })}
        />
        <Segments
          label="Mirror images"
          value={draft.mirror ?? "auto"}
          disabled={locked}
          options={[
            { value: "auto", label: `Auto: ${autoMirror(chirality)}` },
            { value: "merge", label: "Merge", disabled: chirality === "chiral" },
            { value: "keep", label: "Keep" },
          ]}
          help={
            chirality === "chiral"
              ? "The molecule counts as chiral: its mirror image is another compound."
              : undefined
          }
          onChange={(mirror) => set({ mirror })}
        />
        <div className="grid grid-cols-2 gap-x-6 gap-y-4 max-[24rem]:grid-cols-1 sm:col-span-2 xl:grid-cols-4">
          {ensemble.levels.length > 0 ? (
            <LevelSelect
              label="Level that orders the frames"
              levels={ensemble.levels}
              value={draft.level ?? ""}
              disabled={locked}
              onChange={(level) => set({ level })}
            />
          ) : null}
          {energies ? (
            <NumberField
              label="Energy window"
              value={draft.window ?? null}
              optional
              placeholder="none"
              min={0}
              max={100000}
              above
              step={0.5}
              unit="kcal/mol"
              disabled={locked}
              write={formatEnergy}
              wrong="A window lies above 0 kcal/mol, for example 5.00; empty for none."
              onCommit={(window) => set({ window })}
            />
          ) : null}
          <SelectField
            label="Chirality"
            value={draft.chirality ?? "auto"}
            disabled={locked}
            choices={[
              {
                value: "auto",
                label: `Auto: ${ensemble.chirality === "unsure" ? "chiral, unsure" : ensemble.chirality}`,
              },
              { value: "achiral", label: "Take as achiral" },
              { value: "chiral", label: "Take as chiral" },
            ]}
            onChange={(event) => {
              const next = event.currentTarget.value as "auto" | "achiral" | "chiral";
              // Merging mirror images of a chiral molecule is refused; "auto" is right in every case.
              set({ chirality: next, mirror: "auto" });
            }}
          />
          <SelectField
            label="Equivalent atoms"
            value={draft.symmetry === false ? "off" : "on"}
            disabled={locked}
            choices={[
              { value: "on", label: "May exchange" },
              { value: "off", label: "In file order" },
            ]}
            onChange={(event) => set({ symmetry: event.currentTarget.value === "on" })}
          />
        </div>
      </SettingsStrip>
    </BesideField>
  );
}

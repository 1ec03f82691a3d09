import { useMemo, useState } from "react";
import { CumulativePopulation } from "~/components/charts/cumulative-population";
import { EnergyLadder } from "~/components/charts/energy-ladder";
import { LabelledDepthStrip } from "~/components/ui/depth-strip";
import { Formula } from "~/components/ui/formula";
import { LevelName } from "~/components/ui/level-marker";
import { SliderField } from "~/components/ui/slider-field";
import { Viewer, type ViewerProps } from "~/components/viewer/viewer";
import { useCoordinates } from "~/hooks/use-coordinates";
import { formatTemperature, plural, withUnit } from "~/lib/format";
import { formatMeasure, measureKind, measureLabel, measureValue } from "~/lib/measure/measure";
import type { SiftRecipe } from "~/lib/recipe/recipe";
import type { KeptConformer } from "~/lib/recipe/result";
import { distinctPopulations } from "~/lib/thermo/populations";
import { STANDARD_TEMPERATURE_K } from "~/lib/units";
import { type HydrogenMode, TEMPERATURE_RANGE_K, type ViewMode } from "~/lib/url-state";
import type { EnsembleView } from "~/lib/views";
import { byPopulation, type ConformerRow, conformerRows, outsideWindow } from "~/lib/workbench/conformers";
import { cumulativePopulation } from "~/lib/workbench/cumulative";
import { populationsFinding } from "~/lib/workbench/findings";
import { energyLadder } from "~/lib/workbench/ladder";

/** The example as the public page needs it: an ensemble, and the distinct set of its sift. */
export interface ExampleView {
  ensemble: EnsembleView;
  recipe: SiftRecipe;
  kept: KeptConformer[];
}

export interface LiveExample {
  example: ExampleView;
  rows: ConformerRow[];
  temperatureK: number;
  setTemperatureK: (temperatureK: number) => void;
  selected: number;
  select: (frame: number) => void;
}

/** Weighs the example in the browser, by the code that the server runs. */
export function useLiveExample(example: ExampleView): LiveExample {
  const [temperatureK, setTemperatureK] = useState<number>(STANDARD_TEMPERATURE_K);
  const [selected, select] = useState(example.kept[0]?.frame ?? 0);
  const kind =
    example.ensemble.levels.find(({ id }) => id === example.recipe.level)?.energyKind ?? "electronic";
  const rows = useMemo(
    () => conformerRows(example.kept, distinctPopulations(example.kept, kind, temperatureK), null),
    [example.kept, kind, temperatureK],
  );
  return { example, rows, temperatureK, setTemperatureK, selected, select };
}

/** All conformers overlaid, tinted by population; the chosen one in atom colours. */
export function ExampleView3D({ live }: { live: LiveExample }) {
  const { ensemble } = live.example;
  const [mode, setMode] = useState<ViewMode>("overlay");
  const [hydrogens, setHydrogens] = useState<HydrogenMode>("polar");
  const [picked, setPicked] = useState<number[]>([]);
  const order = useMemo(() => byPopulation(live.rows).map((row) => row.frame), [live.rows]);
  const { positions } = useCoordinates(ensemble.id, ensemble.atoms, order);
  const conformers = useMemo<ViewerProps["conformers"]>(
    () =>
      live.rows.flatMap(({ frame, name, population }) => {
        const at = positions.get(frame);
        if (!at || (mode === "one" && frame !== live.selected)) return [];
        return [{ frame, name, population, positions: at, selected: frame === live.selected }];
      }),
    [live.rows, live.selected, positions, mode],
  );
  const kind = measureKind(picked);
  const at = positions.get(live.selected);
  const measures =
    kind !== null && at
      ? [
          {
            label: measureLabel(ensemble.elements, picked),
            text: formatMeasure(kind, measureValue(at, picked)),
          },
        ]
      : [];
  return (
    <Viewer
      elements={ensemble.elements}
      bonds={ensemble.bonds}
      conformers={conformers}
      anchor={positions.get(live.example.kept[0]?.frame ?? 0) ?? null}
      alignOn={null}
      picked={picked}
      onPick={setPicked}
      hydrogens={hydrogens}
      onHydrogens={setHydrogens}
      mode={mode}
      onMode={setMode}
      caption={{
        strong: ensemble.name,
        rest: `${plural(live.rows.length, "conformer")} out of ${plural(ensemble.frames, "frame")}`,
      }}
      measures={measures}
    />
  );
}

/** Temperature, finding, strip and charts: moving the one moves the others at once. */
export function ExampleFigures({ live }: { live: LiveExample }) {
  const { rows, temperatureK, setTemperatureK } = live;
  const ranked = byPopulation(rows);
  const ladder = energyLadder(rows, temperatureK, null);
  const cumulative = cumulativePopulation(rows);
  const finding = populationsFinding(rows, temperatureK);
  const [low, high] = TEMPERATURE_RANGE_K;
  return (
    <section aria-labelledby="example-finding" className="mt-8">
      <div className="grid items-end gap-x-12 gap-y-4 lg:grid-cols-[minmax(0,2fr)_minmax(0,3fr)]">
        <SliderField
          label="Temperature"
          className="noscript:hidden print:hidden"
          value={temperatureK}
          min={low}
          max={high}
          step={1}
          unit="K"
          write={formatTemperature}
          wrong={`A temperature from ${low} to ${high} K, for example 298.15.`}
          onChange={setTemperatureK}
          onCommit={setTemperatureK}
        />
        <h2 id="example-finding" className="figures text-base text-pretty sm:text-lg">
          {finding.text}
        </h2>
      </div>
      <div className="mt-4">
        <LabelledDepthStrip
          shares={ranked.map((row) => row.population ?? 0)}
          names={ranked.map((row) => row.name)}
        />
      </div>
      <ExampleFacts live={live} />
      <div className="mt-8 grid gap-x-10 gap-y-8 lg:grid-cols-2">
        {ladder ? (
          <EnergyLadder
            rows={rows}
            ladder={ladder}
            outside={outsideWindow(rows)}
            windowKcal={null}
            temperatureK={temperatureK}
            selected={new Set([live.selected])}
            onChoose={live.select}
          />
        ) : null}
        {cumulative && ladder ? (
          <CumulativePopulation cumulative={cumulative} windowKcal={null} top={ladder.top} />
        ) : null}
      </div>
    </section>
  );
}

function ExampleFacts({ live }: { live: LiveExample }) {
  const { ensemble, recipe } = live.example;
  const level = ensemble.levels.find(({ id }) => id === recipe.level);
  return (
    <p className="figures mt-4 flex flex-wrap gap-x-6 gap-y-1 text-ink-2">
      <Formula>{ensemble.formula}</Formula>
      <span>{plural(ensemble.atoms, "atom")}</span>
      <span>{plural(ensemble.frames, "frame")}</span>
      {ensemble.held > 0 ? <span>{ensemble.held} held</span> : null}
      {level ? <LevelName name={level.name} ordinal={level.ordinal} /> : null}
      <span>
        {withUnit(formatTemperature(live.temperatureK), "K")}
        <span className="noscript:hidden">, computed in this browser</span>
      </span>
    </p>
  );
}

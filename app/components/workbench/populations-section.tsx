import { memo, useCallback, useDeferredValue, useMemo } from "react";
import { href } from "react-router";
import { CumulativePopulation } from "~/components/charts/cumulative-population";
import { EnergyAgainstRmsd } from "~/components/charts/energy-against-rmsd";
import { EnergyLadder } from "~/components/charts/energy-ladder";
import { MeasureDistribution } from "~/components/charts/measure-distribution";
import type { Choose } from "~/components/charts/plot";
import { Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Skeleton } from "~/components/ui/skeleton";
import { TextLink } from "~/components/ui/text-link";
import { formatCount, plural } from "~/lib/format";
import { measureHistogram } from "~/lib/measure/histogram";
import { measureKind, measureLabel, measureValue } from "~/lib/measure/measure";
import { outsideWindow } from "~/lib/workbench/conformers";
import { cumulativePopulation } from "~/lib/workbench/cumulative";
import { populationsFinding, spreadCaution, windowFinding } from "~/lib/workbench/findings";
import { energyLadder } from "~/lib/workbench/ladder";
import { POPULATION_WORDS } from "~/lib/workbench/recipe-words";
import { ConformerTable, type MeasureColumn } from "./conformer-table";
import { PlainPopulationForm } from "./plain-forms";
import { PopulationSettings } from "./population-settings";
import { OutdatedNote, SectionState } from "./section-state";
import { TemperatureNote } from "./temperature-note";
import { ThermoFigures } from "./thermo-figures";
import { type FoundByFilter, useFoundBy } from "./use-found-by";
import { useShape } from "./use-shape";
import { MAX_MEASURED, useWorkbench } from "./workbench-context";

/** Populations at a temperature: what carries the ensemble, its thermodynamics, four figures, and the table. */
export function PopulationsSection() {
  const { rows, result, sift, temperatureK, state, populations, level } = useWorkbench();
  const outside = useMemo(() => outsideWindow(rows), [rows]);
  const foundBy = useFoundBy();
  const finding = populationsFinding(rows, temperatureK);
  const lines =
    sift && result
      ? windowFinding(rows, outside, state.windowKcal, temperatureK, sift.recipe, result.outsideWindow.length)
      : [];
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Populations"
        aside={<TextLink to={`${href("/methods")}#populations`}>How this is computed</TextLink>}
      />
      {result === null ? (
        <SectionState />
      ) : (
        <>
          <Finding
            more={[finding.second, ...lines, foundBy?.sentence].filter(Boolean).join(" ") || undefined}
          >
            {finding.text}
          </Finding>
          <SpreadNote />
          <OutdatedNote />
          {populations ? (
            <>
              <PopulationSettings />
              <PlainPopulationForm />
              <p className="mt-3 max-w-[46rem] text-xs text-ink-3">
                {POPULATION_WORDS[level?.energyKind ?? "electronic"]}. {populations.weights.reason}
                {level?.energyKind === "electronic"
                  ? " Zero-point and vibrational contributions are not in them; folded shapes often come out too populated."
                  : ""}
              </p>
              <TemperatureNote levels={level ? [level] : []} temperaturesK={[temperatureK]} />
              <ThermoFigures populations={populations} />
              <Charts foundBy={foundBy} />
            </>
          ) : null}
          <Table foundBy={foundBy} />
        </>
      )}
    </section>
  );
}

/** Where the energies are spread as those of conformers are not, the populations above mean little. */
function SpreadNote() {
  const { rows, level } = useWorkbench();
  const caution = useMemo(() => spreadCaution(rows, level), [rows, level]);
  if (caution === null) return null;
  return (
    <Note tone="remark" className="mt-4">
      {caution}
    </Note>
  );
}

// What a slider moves renders twice: at once with the figures as they were, then with the new numbers. The first time must
// cost nothing.
const Ladder = memo(EnergyLadder);
const Cumulative = memo(CumulativePopulation);
const AgainstRmsd = memo(EnergyAgainstRmsd);
const Measured = memo(MeasureDistribution);

/** The four figures, drawn when the slider lets them: the numbers above come first. */
function Charts({ foundBy }: { foundBy: FoundByFilter | null }) {
  const workbench = useWorkbench();
  const rows = useDeferredValue(workbench.rows);
  const temperatureK = useDeferredValue(workbench.temperatureK);
  const { state, selected, select, reference, column, measured } = workbench;
  const windowKcal = state.windowKcal;
  const outside = useMemo(() => outsideWindow(rows), [rows]);
  const ladder = useMemo(
    () => energyLadder(rows, temperatureK, windowKcal),
    [rows, temperatureK, windowKcal],
  );
  const cumulative = useMemo(() => cumulativePopulation(rows), [rows]);
  const chosen = useMemo(() => new Set(selected), [selected]);
  const order = useMemo(() => rows.map((row) => row.frame), [rows]);
  const rmsd = useMemo(
    () => (column ? Array.from(column.rmsd, (value, k) => (k < column.known ? value : null)) : null),
    [column],
  );
  // What the table is narrowed to stands out in the figures, too.
  const shows = foundBy === null || foundBy.chosen === null ? null : foundBy.shows;
  const words = foundBy?.words ?? null;
  const lit = useMemo(
    () =>
      shows === null || words === null
        ? null
        : { rows: new Set(rows.filter(shows).map(({ index }) => index)), words },
    [rows, shows, words],
  );
  const choose = useCallback<Choose>(
    (frame, keys) =>
      select(frame, keys.shiftKey ? "extend" : keys.ctrlKey || keys.metaKey ? "add" : "only", order),
    [select, order],
  );
  if (!ladder || !cumulative) return null;
  return (
    <div className="mt-9 grid gap-x-10 gap-y-8 xl:grid-cols-2">
      <Ladder
        rows={rows}
        ladder={ladder}
        outside={outside}
        windowKcal={windowKcal}
        temperatureK={temperatureK}
        selected={chosen}
        lit={lit}
        onChoose={choose}
      />
      <Cumulative cumulative={cumulative} windowKcal={windowKcal} top={ladder.top} />
      {rows.length > 1 && rmsd === null ? <DistancesAwaited reference={reference?.name ?? "c1"} /> : null}
      {rows.length > 1 && rmsd !== null ? (
        <AgainstRmsd
          rows={rows}
          rmsd={rmsd}
          reference={reference?.name ?? "c1"}
          top={ladder.top}
          selected={chosen}
          lit={lit}
          onChoose={choose}
          note={
            measured.size < rows.length ? `Of the ${formatCount(MAX_MEASURED)} lowest conformers.` : undefined
          }
        />
      ) : null}
      <Distribution onChoose={choose} />
    </div>
  );
}

/** In the place of the figure while the structures are on their way and being compared. */
function DistancesAwaited({ reference }: { reference: string }) {
  const { coordinates } = useWorkbench();
  return (
    <div className="min-w-0 noscript:hidden print:hidden">
      <h3 className="mb-2 text-sm font-semibold">Energy against RMSD to {reference}</h3>
      <div className="relative">
        <Skeleton className="h-80 w-full" />
        <p role="status" className="appear-late absolute inset-0 content-center text-center text-ink-2">
          {coordinates.missing > 0
            ? `${plural(coordinates.missing, "structure")} on the way.`
            : "Comparing the structures."}
        </p>
      </div>
    </div>
  );
}

/** The picked distance, angle or torsion over the ensemble, or how to pick one. */
function Distribution({ onChoose }: { onChoose: Choose }) {
  const { rows } = useWorkbench();
  const settled = useDeferredValue(rows);
  const measure = useMeasure();
  const histogram = useMemo(() => {
    if (!measure) return null;
    const known = settled.filter((row) => measure.fetched[row.index]);
    return {
      known,
      made: measureHistogram(
        measure.kind,
        known.map((row) => measure.values[row.index] ?? null),
        known.map((row) => row.population ?? 0),
        known.map((row) => row.degeneracy),
      ),
    };
  }, [settled, measure]);
  if (!measure || !histogram) {
    return (
      <div className="min-w-0 noscript:hidden print:hidden">
        <h3 className="mb-2 text-sm font-semibold">Distance, angle or torsion</h3>
        <p className="max-w-read text-ink-2">
          Pick two, three or four atoms in the view, or name them below it, to read their distance, angle or
          torsion in every conformer and see how it spreads over the ensemble.
        </p>
      </div>
    );
  }
  const left = settled.length - histogram.known.length;
  return (
    <Measured
      histogram={histogram.made}
      kind={measure.kind}
      name={measure.label}
      rows={histogram.known}
      onChoose={onChoose}
      note={
        [
          left > 0
            ? `${plural(left, "conformer")} not measured yet, or beyond the ${formatCount(MAX_MEASURED)} lowest.`
            : null,
          measure.kind === "torsion" && histogram.known.some((row) => row.degeneracy === 2)
            ? "A conformer that stands for a mirror pair counts half at each sign."
            : null,
        ]
          .filter(Boolean)
          .join(" ") || undefined
      }
    />
  );
}

function Table({ foundBy }: { foundBy: FoundByFilter | null }) {
  const measure = useMeasure();
  const shape = useShape();
  return <ConformerTable measure={measure} shape={shape} foundBy={foundBy} />;
}

/** The picked quantity in every conformer whose coordinates are here. */
function useMeasure(): (MeasureColumn & { fetched: readonly boolean[] }) | null {
  const { ensemble, state, result, coordinates } = useWorkbench();
  return useMemo(() => {
    const picked = state.atoms.filter((atom) => atom < ensemble.atoms);
    const kind = measureKind(picked);
    if (kind === null || result === null) return null;
    const at = result.kept.map((conformer) => coordinates.positions.get(conformer.frame));
    return {
      kind,
      label: measureLabel(ensemble.elements, picked),
      values: at.map((positions) => (positions ? measureValue(positions, picked) : null)),
      fetched: at.map((positions) => positions !== undefined),
    };
  }, [ensemble, state.atoms, result, coordinates.positions]);
}

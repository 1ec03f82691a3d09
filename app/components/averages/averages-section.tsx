import { useMemo } from "react";
import { href, useLocation } from "react-router";
import { FigureFacts } from "~/components/charts/figure-facts";
import { MaybeLevels } from "~/components/columns/maybe-levels";
import { ButtonLink } from "~/components/ui/button";
import { Finding, SectionHead } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { TextLink } from "~/components/ui/text-link";
import { CatchingUp, OutdatedNote, SectionState } from "~/components/workbench/section-state";
import { TemperatureNote } from "~/components/workbench/temperature-note";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useSameSift } from "~/hooks/use-same-sift";
import type { AveragesView } from "~/lib/averages/averages-view";
import { averagesFinding, propertyName } from "~/lib/averages/words";
import { plural } from "~/lib/format";
import { AtomTable } from "./atom-table";
import { AveragesSettings } from "./averages-settings";
import { MeasuredProperties } from "./measured-properties";
import { PickColumn } from "./pick-column";
import { PropertyFigures } from "./property-figures";
import { PropertyTable } from "./property-table";
import { RuleCard } from "./rule-card";
import {
  type Averaged,
  type AveragedProperty,
  averageFacts,
  contributionsTo,
  useAverages,
} from "./use-averages";
import { useAveragesState } from "./use-averages-state";
import { useLevelError, useWeighed, type WeighedConformers } from "./use-weighed";

/** What the flask sees: every property averaged by its own rule, with what makes and what moves it. */
export function AveragesSection({ view }: { view: AveragesView }) {
  const { result, sift } = useWorkbench();
  const same = useSameSift(sift, view.siftId);
  const weighed = useWeighed(view);
  const error = useLevelError(view, weighed);
  const averaged = useAverages(view, weighed, error.sigma);
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Averages"
        aside={<TextLink to={`${href("/methods")}#averages`}>How this is computed</TextLink>}
      />
      {result === null ? (
        <SectionState />
      ) : !same ? (
        <CatchingUp />
      ) : weighed === null || averaged === null ? (
        <StatePanel title="Nothing weighs these conformers" className="mt-6">
          <p>
            {sift?.recipe.level === null
              ? "This sift ran without energies, in file order. Averages need populations, and populations need energies: sift with a level."
              : "No conformer of this set has an energy at this level."}
          </p>
        </StatePanel>
      ) : averaged.properties.length === 0 ? (
        <>
          <NoProperties />
          <PickColumn />
        </>
      ) : (
        <FigureFacts
          facts={[
            { name: "level", value: weighed.level.name },
            { name: "weights", value: weighed.weights.kind },
            { name: "sigma", unit: "kcal/mol", value: error.sigma },
            { name: "draws", value: averaged.draws },
            { name: "seed", value: averaged.draws === null ? null : averaged.seed },
          ]}
        >
          <Filled view={view} weighed={weighed} error={error} averaged={averaged} />
        </FigureFacts>
      )}
    </section>
  );
}

function NoProperties() {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  return (
    <>
      <Finding>There is no property to average yet.</Finding>
      <OutdatedNote />
      <StatePanel
        title="What it needs"
        className="mt-6"
        actions={
          ensemble.mayCompute ? (
            <ButtonLink kind="primary" to={{ pathname: `/ensembles/${ensemble.id}/columns`, search }}>
              Add a property table
            </ButtonLink>
          ) : undefined
        }
      >
        <p>
          A table with one row a frame and one column a quantity (couplings, shifts, dipole moments,
          distances), or atoms picked on the structure: two for a distance, three for an angle, four for a
          torsion or a coupling.
        </p>
      </StatePanel>
    </>
  );
}

function Filled({
  view,
  weighed,
  error,
  averaged,
}: {
  view: AveragesView;
  weighed: WeighedConformers;
  error: ReturnType<typeof useLevelError>;
  averaged: Averaged;
}) {
  const { temperatureK, state, sift, ensemble } = useWorkbench();
  const [{ property: wanted }, changeAverages] = useAveragesState();
  const shown = useShown(averaged, weighed, wanted, temperatureK);
  const perAtom = useMemo(() => atomGroups(averaged.properties), [averaged.properties]);
  const scalars = useMemo(
    () => averaged.properties.filter(({ property }) => property.quantity === null),
    [averaged.properties],
  );
  const mirrorMerged = sift?.recipe.mirror === "merge" && sift.recipe.chirality === "achiral";
  const csv = csvAddress(view.siftId ?? "", temperatureK, state.weights, error.sigma, weighed.level.id);
  if (shown === null) return null;
  const { one, contributions } = shown;
  const named = (property: AveragedProperty["property"]) => ({
    ...property,
    name: propertyName(property, ensemble.elements),
  });
  const finding = averagesFinding(
    {
      property: named(one.property),
      average: one.average,
      mover: contributions.mover && {
        name: contributions.mover.name,
        population: contributions.mover.contribution.population,
        share: contributions.mover.contribution.share,
        without: contributions.mover.contribution.without,
      },
    },
    [...scalars, ...perAtom.flatMap(({ list }) => list)].map(({ property, average }) => ({
      property: named(property),
      average,
    })),
    temperatureK,
  );
  return (
    <>
      <Finding more={finding.second ?? undefined}>{finding.text}</Finding>
      <OutdatedNote />
      <AveragesSettings weighed={weighed} error={error} />
      <p className="mt-3 max-w-[46rem] text-xs text-ink-3">
        {weighed.weights.reason}
        {weighed.without > 0
          ? ` ${plural(weighed.without, "conformer has", "conformers have")} no energy at ${weighed.level.name} and ${weighed.without === 1 ? "takes" : "take"} no part.`
          : ""}
      </p>
      <TemperatureNote levels={[weighed.level]} temperaturesK={averaged.temperatures} />
      <MaybeLevels className="mt-2 max-w-[46rem] text-xs text-ink-2" />
      <PropertyTable
        averaged={averaged}
        counters={view.counters}
        groups={perAtom.map(({ quantity, unit, list }) => ({
          quantity,
          unit,
          groups: list.length,
          covered: Math.min(...list.map((group) => group.average.covered)),
        }))}
        weighed={weighed}
        sigma={error.sigma}
        chosen={one.property.id}
        onChoose={(id) => changeAverages({ property: id })}
        csv={csv}
      />
      {view.total > view.properties.length ? (
        <p className="mt-2 text-xs text-ink-3">
          {plural(view.total - view.properties.length, "further property", "further properties")} of this
          large set stand in the CSV only.
        </p>
      ) : null}
      {one.property.quantity === null ? (
        <>
          <PropertyFigures
            one={one}
            averaged={averaged}
            weighed={weighed}
            list={contributions.list}
            className="mt-9 xl:grid-cols-2"
          />
          {ensemble.mayCompute ? (
            <RuleCard
              key={`${one.property.id}-${one.property.rule}`}
              averaged={one}
              weighed={weighed}
              populations={averaged.populations}
              mirrorMerged={mirrorMerged}
            />
          ) : null}
        </>
      ) : null}
      {scalars.length > 0 ? (
        <MeasuredProperties
          list={scalars}
          said={view.said}
          facts={averageFacts(averaged, weighed, { temperatureK, sigma: error.sigma })}
        />
      ) : null}
      {perAtom.map(({ quantity, list }) => (
        <AtomTable
          key={quantity}
          quantity={quantity}
          list={list}
          averaged={averaged}
          weighed={weighed}
          sigma={error.sigma}
          view={view}
        />
      ))}
      <PickColumn />
    </>
  );
}

/** The property looked at: the one chosen, else the one that a single conformer moves most for its size. */
function useShown(
  averaged: Averaged,
  weighed: WeighedConformers,
  wanted: string | null,
  temperatureK: number,
) {
  return useMemo(() => {
    const scalars = averaged.properties.filter(({ property }) => property.quantity === null);
    const list = scalars.length > 0 ? scalars : averaged.properties;
    const told = list.map((one) => ({
      one,
      contributions: contributionsTo(one, weighed, averaged.populations, temperatureK),
    }));
    const chosen = told.find(({ one }) => one.property.id === wanted);
    if (chosen) return chosen;
    // What somebody picked on the structure is what they look at; a column without a unit may be a mere number.
    const rank = ({ one }: (typeof told)[number]) =>
      one.property.definition ? 2 : one.property.unit === null ? 0 : 1;
    const moved = ({ one, contributions }: (typeof told)[number]) =>
      Math.abs(contributions.mover?.change ?? 0) / Math.max(1e-9, Math.abs(one.average.value ?? 1));
    return told.reduce<(typeof told)[number] | null>(
      (best, next) =>
        best === null || rank(next) > rank(best) || (rank(next) === rank(best) && moved(next) > moved(best))
          ? next
          : best,
      null,
    );
  }, [averaged, weighed, wanted, temperatureK]);
}

/** Per-atom quantities with one entry a group of equivalent atoms. */
function atomGroups(properties: readonly AveragedProperty[]) {
  const quantities = new Map<string, { quantity: string; unit: string | null; list: AveragedProperty[] }>();
  for (const one of properties) {
    const { quantity, unit, atoms } = one.property;
    if (quantity === null || atoms === null) continue;
    const entry = quantities.get(quantity) ?? { quantity, unit, list: [] };
    quantities.set(quantity, entry);
    if (!entry.list.some((other) => other.property.atoms?.[0] === atoms[0])) entry.list.push(one);
  }
  for (const entry of quantities.values()) {
    entry.list.sort((a, b) => (a.property.atoms?.[0] ?? 0) - (b.property.atoms?.[0] ?? 0));
  }
  return [...quantities.values()];
}

function csvAddress(
  siftId: string,
  temperatureK: number,
  weights: string,
  sigma: number | null,
  level: string,
): string {
  const query = new URLSearchParams({ temperature: String(temperatureK), weights, level });
  if (sigma !== null) query.set("sigma", String(sigma));
  return `${href("/files/sifts/:id/averages.csv", { id: siftId })}?${query}`;
}

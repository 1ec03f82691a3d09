import { useDeferredValue, useMemo } from "react";
import { href, useLocation } from "react-router";
import { FigureFacts } from "~/components/charts/figure-facts";
import type { Choose } from "~/components/charts/plot";
import { MaybeLevels } from "~/components/columns/maybe-levels";
import { ButtonLink } from "~/components/ui/button";
import { Finding, SectionHead } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { TextLink } from "~/components/ui/text-link";
import { TemperatureNote } from "~/components/workbench/temperature-note";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useLevelTask } from "~/hooks/use-level-task";
import { formatCount, plural } from "~/lib/format";
import { chooseLevels } from "~/lib/levels/better-level";
import { FEWEST_RESAMPLED } from "~/lib/levels/intervals";
import type { LevelEnergiesView } from "~/lib/levels/level-energies";
import { comparisonStory } from "~/lib/levels/story";
import { nextWindow } from "~/lib/levels/window";
import { AgreementTable, MOST_RESAMPLED } from "./agreement-table";
import { ComparedTable } from "./compared-table";
import { comparisonFacts } from "./comparison-facts";
import { ErrorAgainstEnergy } from "./error-against-energy";
import { LevelAgainstLevel } from "./level-against-level";
import { LevelMatrix } from "./level-matrix";
import { LevelsSettings } from "./levels-settings";
import { LevelsTabs } from "./levels-tabs";
import { PAGE_SEED } from "./page-seed";
import { pairPoints } from "./pair-points";
import { PopulationAgainstPopulation } from "./population-against-population";
import { SlopeChart } from "./slope-chart";
import { type Comparison, type LevelData, useComparison, useLevelData, useMembers } from "./use-comparison";
import { WindowChart } from "./window-chart";
import { WindowTable } from "./window-table";

/** Levels: can the cheap one be trusted, and how wide must its window be? */
export function LevelsSection({ energies }: { energies: readonly LevelEnergiesView[] }) {
  const levels = useLevelData(energies);
  return (
    <section aria-labelledby="section-title">
      <SectionHead id="section-title" title="Levels" aside={<LevelsTabs here="comparison" />} />
      {levels.length < 2 ? <TooFew levels={levels} /> : <Compared levels={levels} />}
    </section>
  );
}

/** One level or none: what the section needs, and the way to it. */
function TooFew({ levels }: { levels: readonly LevelData[] }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const only = levels[0];
  return (
    <>
      <Finding>
        {only
          ? `Only ${only.name} is here. A second level on the same structures shows how far it can be trusted, and how wide a window to carry.`
          : "These frames carry no energies, so there are no levels to compare."}
      </Finding>
      <StatePanel
        title={only ? "A second level is needed" : "Two levels are needed"}
        className="mt-6"
        actions={
          ensemble.mayCompute ? (
            <ButtonLink
              kind="primary"
              to={{ pathname: `${href("/ensembles/:id", { id: ensemble.id })}/columns`, search }}
            >
              Add a level
            </ButtonLink>
          ) : undefined
        }
      >
        <p>
          Bring a table of energies (a column for the frame, one for the energy with its unit) or a structure
          file of the same frames in any order; a property of the files that holds energies can be used as a
          level there too.
          {only ? " A plan can already be drafted with an error typed in for the next level." : ""}
        </p>
        <MaybeLevels className="mt-2" />
      </StatePanel>
    </>
  );
}

function Compared({ levels }: { levels: readonly LevelData[] }) {
  const { state, temperatureK } = useWorkbench();
  const { level, reference } = chooseLevels(levels, state.compare);
  const taken = useMembers(reference);
  const { members, among, weightsReason } = taken;
  const found = useComparison(level, reference, members);
  if (!level || !reference) return null;
  if (found === null) {
    return (
      <>
        <Finding>
          No {among === "conformers" ? "conformer" : "frame"} has an energy at both {level.name} and{" "}
          {reference.name}.
        </Finding>
        <LevelsSettings levels={levels} level={level} reference={reference} found={null} />
      </>
    );
  }
  const story = comparisonStory({
    level: level.name,
    reference: reference.name,
    nameOf: (place) => found.paired.members[place]?.name ?? "",
    comparison: found.comparison,
    meeting: found.meeting,
    covered: found.covered,
    window: { ...found.window, next: nextWindow(found.steps, found.window.kcal) },
  });
  return (
    <>
      <Finding more={[story.second, leftWords(found, among)].filter(Boolean).join(" ")}>{story.text}</Finding>
      <LevelsSettings levels={levels} level={level} reference={reference} found={found} />
      <p className="mt-3 max-w-[46rem] text-xs text-ink-3">{weightsReason}</p>
      <TemperatureNote levels={[level, reference]} temperaturesK={[temperatureK]} />
      <MaybeLevels className="mt-2 max-w-[46rem] text-xs text-ink-2" />
      <FigureFacts facts={comparisonFacts(found, taken, temperatureK)}>
        <Figures found={found} />
      </FigureFacts>
      {levels.length > 2 ? <LevelMatrix levels={levels} members={members} /> : null}
    </>
  );
}

/** Who could not be compared, counted where the number stands. */
function leftWords({ paired, level, reference }: Comparison, among: "conformers" | "accepted"): string {
  const what = among === "conformers" ? "conformer" : "frame";
  if (paired.left.length === 0) return `Every ${what} has both energies.`;
  const names = paired.left.slice(0, 6).map((member) => member.name);
  return (
    `${plural(paired.left.length, what)} left out: ${formatCount(paired.missingLevel)} without an energy at ${level.name}, ` +
    `${formatCount(paired.missingReference)} at ${reference.name} (${names.join(", ")}${paired.left.length > 6 ? ", …" : ""}).`
  );
}

function Figures({ found: live }: { found: Comparison }) {
  const { selected, select, state, temperatureK } = useWorkbench();
  // The sentence above follows the slider at once; the figures follow when there is time.
  const found = useDeferredValue(live);
  const points = useMemo(() => pairPoints(found), [found]);
  const chosen = useMemo(() => new Set(selected), [selected]);
  const order = useMemo(
    () => [...points].sort((a, b) => a.reference - b.reference).map((point) => point.frame),
    [points],
  );
  const choose: Choose = (frame, keys) =>
    select(frame, keys.shiftKey ? "extend" : keys.ctrlKey || keys.metaKey ? "add" : "only", order);
  const { paired, comparison, zeroPlace } = found;
  const sigma = state.compare.sigmaKcal;
  const base = useMemo(
    () => ({ level: paired.level, reference: paired.reference, weights: paired.weights, temperatureK }),
    [paired, temperatureK],
  );
  const resampled = comparison.n <= MOST_RESAMPLED;
  const intervals = useLevelTask(
    "intervals",
    useMemo(
      () =>
        comparison.n >= FEWEST_RESAMPLED && resampled
          ? {
              comparison: {
                ...base,
                align: comparison.align,
                commonPlace: state.compare.zeroFrame === null ? undefined : (zeroPlace ?? undefined),
              },
              seed: PAGE_SEED,
            }
          : null,
      [base, comparison.n, resampled, comparison.align, state.compare.zeroFrame, zeroPlace],
    ),
  );
  const band = useLevelTask(
    "band",
    useMemo(() => (sigma > 0 ? { ...base, error: { sigma }, seed: PAGE_SEED } : null), [base, sigma]),
  );
  const shared = { found, points, selected: chosen, onChoose: choose };
  return (
    <>
      <div className="mt-9 grid gap-x-10 gap-y-8 xl:grid-cols-2">
        <LevelAgainstLevel {...shared} />
        <WindowChart found={found} band={band} />
        <AgreementTable of="energies" {...{ found, intervals, resampled, temperatureK }} />
        <div className="grid content-start gap-y-8">
          <WindowTable found={found} {...{ intervals, resampled, band }} />
          <AgreementTable of="populations" {...{ found, intervals, resampled, temperatureK }} />
        </div>
      </div>
      <ComparedTable {...shared} />
      <div className="mt-9 grid gap-x-10 gap-y-8 xl:grid-cols-2">
        <PopulationAgainstPopulation {...shared} />
        <ErrorAgainstEnergy {...shared} />
        <SlopeChart {...shared} />
      </div>
      <p className="mt-6 text-xs text-ink-3 print:hidden">
        <TextLink to={`${href("/methods")}#levels`}>How this is computed</TextLink>
      </p>
    </>
  );
}

import { useMemo } from "react";
import { href } from "react-router";
import { ErrorField, ErrorSource, LevelChoice } from "~/components/averages/averages-settings";
import { labelClass } from "~/components/ui/field";
import { Finding, SectionHead } from "~/components/ui/finding";
import { StatePanel } from "~/components/ui/state-panel";
import { TextLink } from "~/components/ui/text-link";
import { CatchingUp, OutdatedNote, SectionState } from "~/components/workbench/section-state";
import { SettingsStrip } from "~/components/workbench/settings-strip";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { useSameSift } from "~/hooks/use-same-sift";
import type { AveragesView } from "~/lib/averages/averages-view";
import { formatCount, formatEnergy, formatTemperature } from "~/lib/format";
import type { TrustView } from "~/lib/trust/trust-view";
import { FindingsList } from "./findings-list";
import { PopulationBands } from "./population-bands";
import { RarefactionChart } from "./rarefaction-chart";
import { TemperatureSweep } from "./temperature-sweep";
import { HandTable, SearchTable, TemperatureTable } from "./trust-tables";
import { type Trust, useTrust } from "./use-trust";

/** How far to trust the result: what the level's error moves, what the search may have missed, what hangs on a choice. */
export function TrustSection({ averages, trust }: { averages: AveragesView; trust: TrustView }) {
  const { sift, result } = useWorkbench();
  const same = useSameSift(sift, averages.siftId);
  const found = useTrust(averages, trust);
  return (
    <section aria-labelledby="section-title">
      <SectionHead
        id="section-title"
        title="Trust"
        aside={<TextLink to={`${href("/methods")}#level-error`}>How this is computed</TextLink>}
      />
      {result === null ? (
        <SectionState />
      ) : !same ? (
        <CatchingUp />
      ) : found === null ? (
        <StatePanel title="Nothing weighs these conformers" className="mt-6">
          <p>
            This sift ran without energies, in file order. How far an error moves populations can be said once
            a level weighs them.
          </p>
        </StatePanel>
      ) : (
        <Filled found={found} error={found.error} />
      )}
    </section>
  );
}

function Filled({ found, error }: { found: Trust; error: Parameters<typeof ErrorField>[0]["error"] }) {
  const { result, ensemble, temperatureK, selected, select, rows } = useWorkbench();
  const { weighed, input, findings, headline, searches, populations } = found;
  const chosen = useMemo(() => new Set(selected), [selected]);
  const order = useMemo(() => rows.map((row) => row.frame), [rows]);
  const hits = useMemo(() => (result?.kept ?? []).map((conformer) => conformer.found), [result]);
  const temperatures = useMemo(
    () =>
      [
        ...[200, 250, 300, 350, 400].filter((kelvin) => Math.abs(kelvin - temperatureK) > 5),
        temperatureK,
      ].sort((a, b) => a - b),
    [temperatureK],
  );
  const free = weighed.level.energyKind === "free";
  return (
    <>
      <Finding more={headline.second}>{headline.text}</Finding>
      <OutdatedNote />
      <SettingsStrip
        columns="sm:grid-cols-2 xl:grid-cols-[minmax(8rem,0.8fr)_9rem_minmax(12rem,1.6fr)_auto]"
        words={`Weighed by ${weighed.level.name}, ${formatTemperature(temperatureK)} K, level error ± ${formatEnergy(error.sigma)} kcal/mol.`}
      >
        <LevelChoice weighed={weighed} levels={ensemble.levels} />
        <ErrorField error={error} />
        <ErrorSource error={error} />
        <div>
          <p className={`mb-2 ${labelClass}`}>Draws, seed</p>
          <p className="figures flex min-h-9 items-center">
            {formatCount(found.draws)}, {found.seed}
          </p>
        </div>
      </SettingsStrip>
      <FindingsList findings={findings} />
      <div className="mt-9 grid gap-x-10 gap-y-9 xl:grid-cols-2">
        {input.error ? (
          <PopulationBands
            names={input.names}
            frames={weighed.kept.map(({ frame }) => frame)}
            populations={populations}
            drawn={input.error.drawn}
            selected={chosen}
            onChoose={(frame) => select(frame, "only", order)}
          />
        ) : null}
        {input.names.length > 1 ? (
          <TemperatureSweep
            names={input.names}
            populationsAt={weighed.populationsAt}
            temperatureK={temperatureK}
            note={
              free
                ? "These are free energies of one temperature; at others they do not hold, and each would need its own."
                : "A tint means the same as everywhere. Energies only; with free energies each temperature needs its own."
            }
          />
        ) : null}
        {input.coverage && input.coverage.hits > input.coverage.distinct ? (
          <RarefactionChart found={hits} coverage={input.coverage} />
        ) : null}
        <SearchTable found={searches.found} halves={searches.halves} total={hits.length} />
        {input.hands.length > 0 ? (
          <HandTable hands={input.hands} names={input.names} populations={populations} />
        ) : null}
        <TemperatureTable
          names={input.names}
          temperatures={temperatures}
          temperatureK={temperatureK}
          populationsAt={weighed.populationsAt}
        />
      </div>
    </>
  );
}

import { Download } from "lucide-react";
import { useMemo } from "react";
import { Form, href, useSubmit } from "react-router";
import { saveText, withFacts } from "~/components/charts/export-figure";
import { pageClass } from "~/components/layout/app-shell";
import { Button } from "~/components/ui/button";
import { TextField } from "~/components/ui/field";
import { BlockHead, Finding, SectionHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { SelectField } from "~/components/ui/select-field";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextLink } from "~/components/ui/text-link";
import { useLevelTask } from "~/hooks/use-level-task";
import {
  formatCount,
  formatPercent,
  formatTemperature,
  formatWindowToCarry,
  plural,
  trimmed,
  withUnit,
} from "~/lib/format";
import type { PooledWindow } from "~/lib/levels/pooled";
import { TEMPERATURE_RANGE_K } from "~/lib/url-state";
import { shareWords } from "~/lib/workbench/findings";
import { toCsv } from "~/lib/workbench/tsv";
import type { SeriesLevels } from "~/services/levels/load-series-levels.server";
import { PAGE_SEED } from "./page-seed";

/** Numbers of the settings, as the address names them. */
export type WindowSetting = "keep" | "for" | "T";

export interface WindowsPageData {
  team: { id: string; name: string };
  series: { id: string; name: string }[];
  chosen: { id: string; name: string } | null;
  settings: { share: number; ofMolecules: number; temperatureK: number };
  /** What was typed and is no such number: the default counts instead. */
  refused: Partial<Record<WindowSetting, string>>;
  found: SeriesLevels;
  pooled: PooledWindow | null;
}

/** One window for many molecules: how wide a cheap level must be carried in this series. */
export function WindowsPage(data: WindowsPageData) {
  const { team, chosen, found, pooled, settings } = data;
  const what = chosen ? `the series ${chosen.name}` : team.name;
  return (
    <div className={`${pageClass} pt-6 pb-16`}>
      <SectionHead
        page
        title={`Windows of ${chosen?.name ?? team.name}`}
        aside={<TextLink to={`${href("/methods")}#levels`}>How this is computed</TextLink>}
      />
      {pooled ? (
        <Finding more={moreWords(data, pooled)}>
          To keep {shareWords(settings.share)} of the {found.reference} population for {reachedWords(pooled)},
          carry {withUnit(formatWindowToCarry(pooled.kcal), "kcal/mol")} of {found.level}.
        </Finding>
      ) : (
        <Finding>
          {found.names.length < 2
            ? `No two levels of theory in ${what} yet. Add a second level to its ensembles, under the same name in each.`
            : found.level === found.reference
              ? "A level is not compared with itself: choose another as the reference."
              : `No sifted ensemble of ${what} has energies at both ${found.level} and ${found.reference}.`}
        </Finding>
      )}
      <Settings {...data} />
      {pooled ? <Molecules data={data} pooled={pooled} /> : null}
      <Left data={data} />
      <Note className="mt-6">
        Best case: a window cannot bring back what the sampler never found. What held for these molecules need
        not hold for others.
      </Note>
    </div>
  );
}

function reachedWords(pooled: PooledWindow): string {
  if (pooled.molecules === 1) return "the one molecule here";
  if (pooled.reached === pooled.molecules) return `all ${formatCount(pooled.molecules)} molecules`;
  return `${formatCount(pooled.reached)} of ${plural(pooled.molecules, "molecule")}`;
}

function moreWords({ found, settings }: WindowsPageData, pooled: PooledWindow): string {
  const widest = pooled.each.reduce((most, one) => Math.max(most, one.kcal), 0);
  const all =
    pooled.reached < pooled.molecules
      ? ` All of them need ${withUnit(formatWindowToCarry(widest), "kcal/mol")}.`
      : "";
  const few =
    pooled.molecules > 1 && pooled.molecules < 10
      ? ` With ${plural(pooled.molecules, "molecule")}, ${formatPercent(settings.ofMolecules)} of them means ${formatCount(pooled.reached)}.`
      : "";
  return `${weightsWords(found.molecules)} At ${withUnit(formatTemperature(settings.temperatureK), "K")}, over the distinct sets with energies at ${found.level} and ${found.reference}.${all}${few}`;
}

/** By which weights the populations are taken. */
function weightsWords(molecules: SeriesLevels["molecules"]): string {
  const kinds = [...new Set(molecules.map(({ weighedBy }) => weighedBy))];
  return kinds.length > 1
    ? "Populations count each conformer by its copies, and by its degeneracy where the reference gives free energies."
    : `Populations count each conformer by its ${kinds[0] ?? "copies"}.`;
}

/** A plain form: it works without script, and sends itself where there is one. */
function Settings({ team, series, chosen, settings, refused, found }: WindowsPageData) {
  const submit = useSubmit();
  const names = found.names.map(({ name, ensembles }) => ({
    value: name,
    label: `${name}, in ${formatCount(ensembles)}`,
  }));
  return (
    <Form
      key={JSON.stringify([chosen?.id, found.level, found.reference, settings, refused])}
      method="get"
      className={`mt-6 grid grid-cols-2 gap-x-6 gap-y-4 border-y border-rule py-4 lg:grid-cols-4 xl:grid-cols-7 print:hidden ${Object.keys(refused).length > 0 ? "items-start" : "items-end"}`}
      onChange={(event) => {
        if (event.target instanceof HTMLSelectElement)
          void submit(event.currentTarget, { preventScrollReset: true });
      }}
      aria-label="Settings"
    >
      <SelectField
        label="Series"
        name="series"
        defaultValue={chosen?.id ?? ""}
        choices={[
          { value: "", label: `All of ${team.name}` },
          ...series.map(({ id, name }) => ({ value: id, label: name })),
        ]}
      />
      <SelectField label="Level" name="level" defaultValue={found.level ?? ""} choices={names} />
      <SelectField label="Reference" name="ref" defaultValue={found.reference ?? ""} choices={names} />
      <TextField
        label="Keep, %"
        name="keep"
        inputMode="decimal"
        defaultValue={refused.keep ?? trimmed(100 * settings.share, 2)}
        error={refused.keep === undefined ? undefined : "From 1 to 100 %. Shown: 95 %."}
        autoComplete="off"
      />
      <TextField
        label="Of the molecules, %"
        name="for"
        inputMode="decimal"
        defaultValue={refused.for ?? trimmed(100 * settings.ofMolecules, 2)}
        error={refused.for === undefined ? undefined : "From 1 to 100 %. Shown: 90 %."}
        autoComplete="off"
      />
      <TextField
        label="Temperature, K"
        name="T"
        inputMode="decimal"
        defaultValue={refused.T ?? formatTemperature(settings.temperatureK)}
        error={
          refused.T === undefined
            ? undefined
            : `From ${TEMPERATURE_RANGE_K[0]} to ${formatCount(TEMPERATURE_RANGE_K[1])} K. Shown: 298.15 K.`
        }
        autoComplete="off"
      />
      <Button type="submit">Find the window</Button>
    </Form>
  );
}

function Molecules({ data, pooled }: { data: WindowsPageData; pooled: PooledWindow }) {
  const { found, settings } = data;
  const interval = useLevelTask(
    "pooled",
    useMemo(
      () =>
        found.molecules.length > 1
          ? { molecules: found.molecules, options: { ...settings, seed: PAGE_SEED } }
          : null,
      [found.molecules, settings],
    ),
  );
  const rows = found.molecules
    .map((molecule, k) => ({ molecule, each: pooled.each[k] }))
    .flatMap(({ molecule, each }) => (each ? [{ molecule, each }] : []))
    .sort((a, b) => b.each.kcal - a.each.kcal);
  const range = interval?.intervals.kcal;
  return (
    <section className="mt-9" aria-labelledby="pooled-molecules">
      <BlockHead id="pooled-molecules" title={`${plural(rows.length, "molecule")}, the hardest first`}>
        <Button
          size="sm"
          icon={<Download aria-hidden="true" />}
          onClick={() => saveText("windows.csv", "text/csv", csvOf(rows, data, pooled))}
        >
          CSV
        </Button>
      </BlockHead>
      <Table aria-labelledby="pooled-molecules">
        <thead>
          <tr>
            <Th>Ensemble</Th>
            <Th align="right" unit="kcal/mol">
              Needs
            </Th>
            <Th align="right" className="max-sm:hidden">
              Conformers for that
            </Th>
            <Th align="right" unit={`within ${formatWindowToCarry(pooled.kcal)} kcal/mol`}>
              Kept
            </Th>
            <Th
              align="right"
              unit={`within ${formatWindowToCarry(pooled.kcal)} kcal/mol`}
              className="max-sm:hidden"
            >
              Conformers
            </Th>
          </tr>
        </thead>
        <tbody>
          {rows.map(({ molecule, each }) => (
            <Tr key={molecule.ensembleId}>
              <Td wrap>
                <TextLink to={comparisonOf(molecule, settings)}>{molecule.name}</TextLink>
                {each.kcal > pooled.carriedKcal ? (
                  <span className="block text-xs text-mark">not served by this window</span>
                ) : null}
              </Td>
              <Td align="right">{formatWindowToCarry(each.kcal, each.next)}</Td>
              <Td align="right" className="max-sm:hidden">
                {formatCount(each.count)} of {formatCount(each.of)}
              </Td>
              <Td align="right">{formatPercent(each.kept, 1)}</Td>
              <Td align="right" className="max-sm:hidden">
                {formatCount(each.keptCount)} of {formatCount(each.of)}
              </Td>
            </Tr>
          ))}
        </tbody>
      </Table>
      <p className="mt-2 max-w-read text-xs text-ink-3" aria-live="polite">
        {range
          ? `95 % interval of the window ${formatWindowToCarry(range.low)} to ${formatWindowToCarry(range.high)} kcal/mol: ${formatCount(interval.resamples)} resamples of the molecules and then of the conformers of each, ${interval.generator}, seed ${interval.seed}.`
          : rows.length > 1
            ? "The interval of the window is being drawn."
            : "One molecule gives no interval."}
      </p>
    </section>
  );
}

/** The comparison of the same two levels in the section of the ensemble, with the same share and temperature. */
function comparisonOf(
  { ensembleId, ids }: SeriesLevels["molecules"][number],
  { share, temperatureK }: WindowsPageData["settings"],
) {
  const search = new URLSearchParams({
    T: String(temperatureK),
    level: ids.level,
    ref: ids.reference,
    keep: trimmed(100 * share, 9),
  });
  return { pathname: href("/ensembles/:id/levels", { id: ensembleId }), search: `?${search}` };
}

function Left({ data }: { data: WindowsPageData }) {
  const { left } = data.found;
  if (left.length === 0) return null;
  return (
    <section className="mt-9" aria-labelledby="pooled-left">
      <BlockHead id="pooled-left" title={`${plural(left.length, "ensemble")} left out`} />
      <ul className="grid gap-2 text-ink-2">
        {left.slice(0, 50).map(({ ensembleId, name, why }) => (
          <li key={ensembleId}>
            <TextLink to={href("/ensembles/:id/levels", { id: ensembleId })}>{name}</TextLink>: {why}
          </li>
        ))}
      </ul>
    </section>
  );
}

function csvOf(
  rows: { molecule: SeriesLevels["molecules"][number]; each: PooledWindow["each"][number] }[],
  { found, settings }: WindowsPageData,
  pooled: PooledWindow,
): string {
  const { head, rows: cells } = withFacts(
    [
      "ensemble",
      "id",
      "window needed [kcal/mol]",
      "conformers for it",
      "conformers",
      "kept [%]",
      "conformers kept",
    ],
    rows.map(({ molecule, each }) => [
      molecule.name,
      molecule.ensembleId,
      each.kcal,
      each.count,
      each.of,
      100 * each.kept,
      each.keptCount,
    ]),
    [
      { name: "common window", unit: "kcal/mol", value: pooled.carriedKcal },
      { name: "weights", value: [...new Set(found.molecules.map((one) => one.weighedBy))].join(", ") },
      { name: "share to keep", unit: "%", value: 100 * settings.share },
      { name: "temperature", unit: "K", value: settings.temperatureK },
      { name: "level", value: found.level ?? "" },
      { name: "reference", value: found.reference ?? "" },
    ],
  );
  return toCsv(head, cells);
}

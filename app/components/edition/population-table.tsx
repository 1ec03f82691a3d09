import { Table, Td, Th, Tr } from "~/components/ui/table";
import { PopulationBar } from "~/components/workbench/population-bar";
import type { EditionView } from "~/lib/edition/views";
import { formatCount, formatEnergy, formatPercent, formatPopulation, formatTemperature } from "~/lib/format";
import { byPopulation, type ConformerRow } from "~/lib/workbench/conformers";
import { EditionHead } from "./edition-head";

const FIRST = 8;
/** More would be a list, not a report: paper then says where the others stand. */
const UNFOLDED_ON_PAPER = 32;

/** Conformers with their populations, the first ones open, the rest unfolded where somebody asks and on paper. */
export function PopulationTable({ edition }: { edition: EditionView }) {
  const rows = edition.temperature === null ? edition.rows : byPopulation(edition.rows);
  const widest = Math.max(...edition.rows.map((row) => row.population ?? 0), 0);
  const [first, rest] = [rows.slice(0, FIRST), rows.slice(FIRST)];
  const left = rest.reduce((sum, row) => sum + (row.population ?? 0), 0);
  const beyond = edition.conformers - edition.rows.length;
  return (
    <section aria-labelledby="edition-populations">
      <EditionHead id="edition-populations">
        {edition.temperature === null
          ? "Conformers"
          : `Populations at ${formatTemperature(edition.temperature)} K`}
      </EditionHead>
      <div className="mt-3">
        <Rows rows={first} widest={widest} label="Conformers" head />
        {rest.length > 0 ? (
          <details className={rest.length <= UNFOLDED_ON_PAPER ? "unfold" : ""}>
            <summary className="figures cursor-pointer border-b border-rule px-3 py-2 text-ink-2 max-sm:px-2">
              {formatCount(rest.length)} more
              {edition.temperature === null ? "" : `, ${formatPercent(left, 1)} together`} ·{" "}
              <span className="text-link underline underline-offset-3 print:hidden">
                show all {formatCount(rows.length)}
              </span>
              <span className="not-print:hidden">in results.csv</span>
            </summary>
            <Rows rows={rest} widest={widest} label="Further conformers" />
          </details>
        ) : null}
        {beyond > 0 ? (
          <p className="figures mt-2 text-xs text-ink-3">{formatCount(beyond)} more in results.csv.</p>
        ) : null}
      </div>
    </section>
  );
}

function Rows({
  rows,
  widest,
  label,
  head = false,
}: {
  rows: readonly ConformerRow[];
  widest: number;
  label: string;
  head?: boolean;
}) {
  return (
    <Table aria-label={label} className="table-fixed">
      <colgroup>
        <col className="w-[16%]" />
        <col className="w-[22%]" />
        <col className="w-[16%]" />
        <col />
        <col className="w-[16%] max-sm:hidden" />
        <col className="w-[14%]" />
      </colgroup>
      <thead className={head ? "" : "sr-only"}>
        <tr>
          <Th>
            <span className="sr-only">Conformer</span>
          </Th>
          <Th align="right" unit="kcal/mol">
            Energy
          </Th>
          <Th align="right" unit="%">
            Population
          </Th>
          <Th>
            <span className="sr-only">Bar</span>
          </Th>
          <Th align="right" className="max-sm:hidden">
            Degeneracy
          </Th>
          <Th align="right" unit="times">
            Found
          </Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Tr key={row.frame} className="figures">
            <Td className="font-medium">{row.name}</Td>
            <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
            <Td align="right">{formatPopulation(row.population)}</Td>
            <Td>
              {row.population === null ? null : <PopulationBar population={row.population} widest={widest} />}
            </Td>
            <Td align="right" className="max-sm:hidden">
              {row.degeneracy}
            </Td>
            <Td align="right">{formatCount(row.found)}</Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  );
}

import { depthFill } from "~/components/ui/depth-strip";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import type { EditionView } from "~/lib/edition/views";
import {
  formatCount,
  formatEnergy,
  formatPercent,
  formatPopulation,
  formatTemperature,
  withUnit,
} from "~/lib/format";
import { byPopulation, type ConformerRow } from "~/lib/workbench/conformers";
import { EditionHead } from "./edition-head";

const FIRST = 8;
/** More would be a list, not a report: paper then says where the others stand. */
const UNFOLDED_ON_PAPER = 32;

type Drawn = NonNullable<EditionView["uncertainty"]>["populations"][number];

/** Conformers with their populations, the first ones open, the rest unfolded where somebody asks and on paper. */
export function PopulationTable({ edition }: { edition: EditionView }) {
  const { uncertainty } = edition;
  const rows = edition.temperature === null ? edition.rows : byPopulation(edition.rows);
  const drawn = (row: ConformerRow) => uncertainty?.populations[row.index] ?? null;
  const widest = Math.max(...rows.map((row) => Math.max(row.population ?? 0, drawn(row)?.high ?? 0)), 0);
  const [first, rest] = [rows.slice(0, FIRST), rows.slice(FIRST)];
  const left = rest.reduce((sum, row) => sum + (row.population ?? 0), 0);
  const beyond = edition.conformers - edition.rows.length;
  const shared = { widest, drawn, ranges: uncertainty !== null };
  return (
    <section aria-labelledby="edition-populations" className="min-w-0">
      <EditionHead id="edition-populations">
        {edition.temperature === null
          ? "Conformers"
          : `Populations at ${formatTemperature(edition.temperature)} K`}
      </EditionHead>
      <div className="mt-3">
        <Rows {...shared} rows={first} label="Conformers" head />
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
            <Rows {...shared} rows={rest} label="Further conformers" />
          </details>
        ) : null}
        {beyond > 0 ? (
          <p className="figures mt-2 text-xs text-ink-3">{formatCount(beyond)} more in results.csv.</p>
        ) : null}
        {uncertainty ? (
          <p className="figures mt-2 max-w-read text-xs text-ink-3">
            Range: 95 % of {formatCount(uncertainty.draws)} draws with an error of ±{" "}
            {withUnit(formatEnergy(uncertainty.sigma), "kcal/mol")} in each energy
            {uncertainty.sigmaFrom === null ? "" : `, its deviation from ${uncertainty.sigmaFrom}`} (seed{" "}
            {uncertainty.seed}). Lowest in: share of the draws in which a conformer has the lowest energy.
          </p>
        ) : null}
      </div>
    </section>
  );
}

function Rows({
  rows,
  widest,
  drawn,
  ranges,
  label,
  head = false,
}: {
  rows: readonly ConformerRow[];
  widest: number;
  drawn: (row: ConformerRow) => Drawn | null;
  ranges: boolean;
  label: string;
  head?: boolean;
}) {
  return (
    <Table aria-label={label} className="table-fixed">
      <colgroup>
        <col className="w-[12%]" />
        <col className="w-[16%] max-sm:w-[22%]" />
        <col className="w-[15%] max-sm:w-[22%]" />
        {ranges ? <col className="w-[17%] max-sm:w-[26%]" /> : null}
        <col className="max-sm:hidden" />
        {ranges ? <col className="w-[13%] max-sm:w-[18%]" /> : null}
        <col className="w-[11%] max-sm:hidden" />
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
          {ranges ? (
            <Th align="right" unit="%">
              95 % range
            </Th>
          ) : null}
          <Th className="max-sm:hidden">
            <span className="sr-only">Bar</span>
          </Th>
          {ranges ? (
            <Th align="right" unit="%">
              Lowest in
            </Th>
          ) : null}
          <Th align="right" unit="times" className="max-sm:hidden">
            Found
          </Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => {
          const range = drawn(row);
          return (
            <Tr key={row.frame} className="figures">
              <Td className="font-medium">{row.name}</Td>
              <Td align="right">{formatEnergy(row.relativeEnergy)}</Td>
              <Td align="right">{formatPopulation(row.population)}</Td>
              {ranges ? (
                <Td align="right" className="text-ink-2">
                  {range ? `${formatPopulation(range.low)} to ${formatPopulation(range.high)}` : "–"}
                </Td>
              ) : null}
              <Td className="max-sm:hidden">
                {row.population === null ? null : (
                  <RangeBar population={row.population} range={range} widest={widest} />
                )}
              </Td>
              {ranges ? <Td align="right">{range ? formatPopulation(range.lowest, 0) : "–"}</Td> : null}
              <Td align="right" className="max-sm:hidden">
                {formatCount(row.found)}
              </Td>
            </Tr>
          );
        })}
      </tbody>
    </Table>
  );
}

/** The population as a bar in its tint with an ink cap, and its range as a line across it. */
function RangeBar({
  population,
  range,
  widest,
}: {
  population: number;
  range: Drawn | null;
  widest: number;
}) {
  const at = (share: number) => `${widest > 0 ? 100 * Math.min(1, share / widest) : 0}%`;
  return (
    <svg aria-hidden="true" width="100%" height="12" className="block overflow-visible">
      <rect width={at(population)} height="12" className={depthFill(population)} />
      <rect x={at(population)} width="1.5" height="12" transform="translate(-1.5)" className="fill-ink" />
      {range ? (
        <g className="stroke-mark" strokeWidth="1.5">
          <line x1={at(range.low)} x2={at(range.high)} y1="6" y2="6" />
          <line x1={at(range.low)} x2={at(range.low)} y1="3" y2="9" />
          <line x1={at(range.high)} x2={at(range.high)} y1="3" y2="9" />
        </g>
      ) : null}
    </svg>
  );
}

import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import {
  againstUncertainty,
  type ComparedAverage,
  type ComparedConformer,
  changeSentence,
  type EditionComparison,
} from "~/lib/edition/compare";
import type { HandOverView } from "~/lib/edition/views";
import { fixed, formatCount, formatPopulation, plural, signed } from "~/lib/format";

const MOST_ROWS = 40;

/** What changed between two editions: in words, setting by setting, conformer by conformer. */
export function CompareBlock({ comparison }: { comparison: NonNullable<HandOverView["comparison"]> }) {
  const { before, after, result } = comparison;
  const { changes } = result;
  const conformers = result.conformers.filter(differs);
  const same = result.conformers.length - conformers.length;
  return (
    <section className="mt-8" aria-labelledby="compare-title">
      <BlockHead title={`Edition ${after} against edition ${before}`} id="compare-title" />
      <p className="figures max-w-read">{changeSentence(result.words)}</p>
      {changes.length > 0 ? (
        <Table aria-label="Settings and counts that differ" className="mt-4">
          <thead>
            <tr>
              <Th>What</Th>
              <Th>Edition {before}</Th>
              <Th>Edition {after}</Th>
            </tr>
          </thead>
          <tbody>
            {changes.map((change) => (
              <Tr key={change.what} className="figures">
                <Td wrap>{change.what}</Td>
                <Td wrap className="text-ink-2">
                  {change.before}
                </Td>
                <Td wrap className="font-medium">
                  {change.after}
                </Td>
              </Tr>
            ))}
          </tbody>
        </Table>
      ) : null}
      <OpenChanges open={result.open} before={before} after={after} />
      {conformers.length > 0 ? (
        <ConformerTable before={before} after={after} rows={conformers.slice(0, MOST_ROWS)} />
      ) : null}
      {result.averages.length > 0 ? (
        <AverageTable before={before} after={after} rows={result.averages} />
      ) : null}
      <p className="figures mt-2 text-ink-2">
        {same === 0 ? "No conformer is" : `${plural(same, "conformer is", "conformers are")}`} the same in
        both, with the same printed population.
      </p>
      {conformers.length > MOST_ROWS ? (
        <p className="figures mt-2 text-xs text-ink-3">
          {formatCount(conformers.length - MOST_ROWS)} more conformers; results.csv of both editions has all.
        </p>
      ) : null}
    </section>
  );
}

/** What was settled, and what is newly open. */
function OpenChanges({
  open,
  before,
  after,
}: {
  open: EditionComparison["open"];
  before: number;
  after: number;
}) {
  const lines = [
    { words: `Open in edition ${before}, no longer in edition ${after}`, titles: open.settled },
    { words: `Newly open in edition ${after}`, titles: open.added },
  ].filter(({ titles }) => titles.length > 0);
  return lines.map(({ words, titles }) => (
    <p key={words} className="figures mt-3 max-w-read">
      <span className="font-medium">{words}:</span> {titles.join(" ")}
    </p>
  ));
}

/** Averages of both, each with its uncertainty; a change that its uncertainty covers says nothing. */
function AverageTable({
  before,
  after,
  rows,
}: {
  before: number;
  after: number;
  rows: readonly ComparedAverage[];
}) {
  return (
    <Table aria-label="Averages in both" className="mt-4">
      <thead>
        <tr>
          <Th>Average</Th>
          <Th align="right">Edition {before}</Th>
          <Th align="right">Edition {after}</Th>
          <Th align="right">Change</Th>
          <Th className="max-sm:hidden">Against its uncertainty</Th>
        </tr>
      </thead>
      <tbody>
        {rows.slice(0, MOST_ROWS).map((row) => {
          const change = row.before === null || row.after === null ? null : row.after - row.before;
          const scale = row.sdAfter ?? row.sdBefore ?? Math.abs((row.after ?? row.before ?? 1) / 100);
          const digits = Math.min(4, Math.max(0, 1 - Math.floor(Math.log10(scale || 1))));
          const shown = (value: number | null, sd: number | null) =>
            value === null ? "–" : `${fixed(value, digits)}${sd === null ? "" : ` ± ${fixed(sd, digits)}`}`;
          return (
            <Tr key={`${row.property} ${row.unit}`} className="figures">
              <Td wrap>
                {row.property}
                {row.unit ? <span className="text-ink-3"> {row.unit}</span> : null}
                {row.beyond === null ? (
                  <span className="block text-xs text-ink-2 sm:hidden">
                    {againstUncertainty(row, before, after)}
                  </span>
                ) : null}
              </Td>
              <Td align="right">{shown(row.before, row.sdBefore)}</Td>
              <Td align="right">{shown(row.after, row.sdAfter)}</Td>
              <Td align="right">{change === null ? "–" : signed(change, digits)}</Td>
              <Td wrap className="text-ink-2 max-sm:hidden">
                {againstUncertainty(row, before, after)}
              </Td>
            </Tr>
          );
        })}
      </tbody>
    </Table>
  );
}

/** Another place in the set, another printed population, or in one edition only. */
function differs(row: ComparedConformer): boolean {
  const printed = (value: number | null) => formatPopulation(value);
  return row.before !== row.after || printed(row.populationBefore) !== printed(row.populationAfter);
}

function ConformerTable({
  before,
  after,
  rows,
}: {
  before: number;
  after: number;
  rows: readonly ComparedConformer[];
}) {
  return (
    <Table aria-label="Conformers that differ" className="mt-4">
      <thead>
        <tr>
          <Th>Frame</Th>
          <Th>Edition {before}</Th>
          <Th>Edition {after}</Th>
          <Th align="right" unit="%" className="max-sm:hidden">
            Before
          </Th>
          <Th align="right" unit="%">
            After
          </Th>
          <Th align="right" unit="%" className="max-lg:hidden">
            Range before
          </Th>
          <Th align="right" unit="% points">
            Change
          </Th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <Tr key={row.frame} className="figures">
            <Td>{row.frame}</Td>
            <Td wrap>{row.before ?? <span className="text-ink-3">{row.note}</span>}</Td>
            <Td wrap>{row.after ?? <span className="text-ink-3">{row.note}</span>}</Td>
            <Td align="right" className="max-sm:hidden">
              {formatPopulation(row.populationBefore)}
            </Td>
            <Td align="right">{formatPopulation(row.populationAfter)}</Td>
            <Td align="right" className="text-ink-2 max-lg:hidden">
              {row.rangeBefore
                ? `${formatPopulation(row.rangeBefore[0])} to ${formatPopulation(row.rangeBefore[1])}`
                : "–"}
            </Td>
            <Td align="right">
              {row.populationBefore === null || row.populationAfter === null
                ? "–"
                : signed(100 * (row.populationAfter - row.populationBefore), 1)}
            </Td>
          </Tr>
        ))}
      </tbody>
    </Table>
  );
}

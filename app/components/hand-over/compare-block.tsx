import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { type ComparedConformer, changeSentence } from "~/lib/edition/compare";
import type { HandOverView } from "~/lib/edition/views";
import { formatCount, formatPopulation, plural, signed } from "~/lib/format";

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
      {conformers.length > 0 ? (
        <ConformerTable before={before} after={after} rows={conformers.slice(0, MOST_ROWS)} />
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

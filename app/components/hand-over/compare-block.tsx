import { BlockHead } from "~/components/ui/finding";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { changeSentence } from "~/lib/edition/compare";
import type { HandOverView } from "~/lib/edition/views";
import { formatCount, formatPopulation, signed } from "~/lib/format";

const MOST_ROWS = 40;

/** What changed between two editions: in words, setting by setting, conformer by conformer. */
export function CompareBlock({ comparison }: { comparison: NonNullable<HandOverView["comparison"]> }) {
  const { before, after, result } = comparison;
  const { changes, conformers } = result;
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
      <Table aria-label="Conformers of both editions" className="mt-4">
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
          {conformers.slice(0, MOST_ROWS).map((row) => (
            <Tr key={row.frame} className="figures">
              <Td>{row.frame}</Td>
              <Td>{row.before ?? <span className="text-ink-3">{row.note}</span>}</Td>
              <Td>{row.after ?? <span className="text-ink-3">{row.note}</span>}</Td>
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
      {conformers.length > MOST_ROWS ? (
        <p className="figures mt-2 text-xs text-ink-3">
          {formatCount(conformers.length - MOST_ROWS)} more conformers; results.csv of both editions has all.
        </p>
      ) : null}
    </section>
  );
}

import { Download } from "lucide-react";
import { useMemo, useState } from "react";
import { type FigureFact, saveText, withFacts } from "~/components/charts/export-figure";
import { useFigureFacts } from "~/components/charts/figure-facts";
import type { Choose } from "~/components/charts/plot";
import { Button } from "~/components/ui/button";
import { BlockHead } from "~/components/ui/finding";
import { BreakableName, LevelName } from "~/components/ui/level-marker";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextButton } from "~/components/ui/text-link";
import { PopulationBar } from "~/components/workbench/population-bar";
import { fixed, formatCount, formatEnergy, formatPopulation, plural, signed, withUnit } from "~/lib/format";
import { placeRanks } from "~/lib/stats/ranks";
import { toCsv } from "~/lib/workbench/tsv";
import { type PairPoint, percent } from "./pair-points";
import type { Comparison } from "./use-comparison";

const FIRST_ROWS = 12;

/** A level may be called "DLPNO-CCSD(T)/def2-TZVP//B3LYP-D3/6-31G(d)": its head breaks anywhere rather than widen the page. */
export const LONG_NAMES =
  "min-w-22 whitespace-normal! [overflow-wrap:anywhere] max-sm:min-w-18 [&_span]:whitespace-normal";

/** More rows than a page carries without stumbling; the CSV has all. */
const MOST_ROWS = 1000;

type Order = "reference" | "level" | "deviation" | "moves";

interface Line {
  point: PairPoint;
  atLevel: number;
  atReference: number;
}

/** One row a conformer: both energies, deviation, ranks, both populations. A click selects it everywhere. */
export function ComparedTable({
  found,
  points,
  selected,
  onChoose,
}: {
  found: Comparison;
  points: readonly PairPoint[];
  selected: ReadonlySet<number>;
  onChoose: Choose;
}) {
  const facts = useFigureFacts();
  const { level, reference, paired, comparison } = found;
  const [order, setOrder] = useState<Order>("reference");
  const [all, setAll] = useState(false);
  const lines = useMemo(() => {
    const atLevel = placeRanks(paired.level);
    const atReference = placeRanks(paired.reference);
    return points.map((point) => ({
      point,
      atLevel: atLevel[point.place] ?? 0,
      atReference: atReference[point.place] ?? 0,
    }));
  }, [paired, points]);
  const sorted = useMemo(() => [...lines].sort(ORDERS[order]), [lines, order]);
  const shown = sorted.slice(0, all ? MOST_ROWS : FIRST_ROWS);
  const rest = sorted.slice(shown.length);
  const widest = points.reduce((most, p) => Math.max(most, p.levelPopulation, p.referencePopulation), 0);
  const outliers = comparison.sd === null ? Number.POSITIVE_INFINITY : 2 * comparison.sd;
  const head = (name: Order) => ({
    sort: order === name ? ("up" as const) : null,
    onSort: () => setOrder(name),
  });
  const words = {
    reference: "lowest at the reference first",
    level: `lowest at ${level.name} first`,
    deviation: "farthest off first",
    moves: "farthest moved first",
  }[order];
  return (
    <section className="mt-9" aria-labelledby="compared">
      <BlockHead id="compared" title={`Conformers, ${words}`}>
        <Button
          size="sm"
          icon={<Download aria-hidden="true" />}
          onClick={() => saveText("levels.csv", "text/csv", csvOf(found, sorted, facts()))}
        >
          CSV
        </Button>
      </BlockHead>
      <Table
        aria-labelledby="compared"
        className="print:text-xs print:[&_td]:px-1 print:[&_th]:min-w-0 print:[&_th]:px-1"
      >
        <thead>
          <tr>
            <Th>Conformer</Th>
            <Th align="right" unit="kcal/mol" className={LONG_NAMES} {...head("level")}>
              <LevelName name={level.name} ordinal={level.ordinal} />
            </Th>
            <Th align="right" unit="kcal/mol" className={LONG_NAMES} {...head("reference")}>
              <LevelName name={reference.name} ordinal={reference.ordinal} />
            </Th>
            <Th align="right" unit="kcal/mol" {...head("deviation")}>
              Deviation
            </Th>
            <Th align="right" className="max-sm:hidden">
              Rank
            </Th>
            <Th className="max-sm:hidden" {...head("moves")}>
              Moves
            </Th>
            <Th
              unit={
                <>
                  <BreakableName name={level.name} />, %
                </>
              }
              className={`max-xl:hidden print:table-cell ${LONG_NAMES}`}
            >
              Population
            </Th>
            <Th
              unit={
                <>
                  <BreakableName name={reference.name} />, %
                </>
              }
              className={`max-xl:hidden print:table-cell ${LONG_NAMES}`}
            >
              Population
            </Th>
          </tr>
        </thead>
        <tbody>
          {shown.map(({ point, atLevel, atReference }) => (
            <Tr
              key={point.frame}
              selected={selected.has(point.frame)}
              className="cursor-pointer hover:bg-sunk"
              onClick={(event) => onChoose(point.frame, event)}
            >
              <Td>
                <button
                  type="button"
                  className="font-semibold"
                  aria-pressed={selected.has(point.frame)}
                  aria-label={`Select ${point.name}`}
                  onClick={(event) => {
                    event.stopPropagation();
                    onChoose(point.frame, event);
                  }}
                >
                  {point.name}
                </button>
                <span className="block text-xs text-ink-3">frame {formatCount(point.frame)}</span>
              </Td>
              <Td align="right">{formatEnergy(point.level)}</Td>
              <Td align="right">{formatEnergy(point.reference)}</Td>
              <Td align="right" className={Math.abs(point.deviation) > outliers ? "font-semibold" : ""}>
                {signed(point.deviation, 2)}
              </Td>
              <Td align="right" className="max-sm:hidden">
                {formatCount(atLevel)} to {formatCount(atReference)}
              </Td>
              <Td className="text-ink-3 max-sm:hidden">{movesWords(atLevel - atReference)}</Td>
              {[point.levelPopulation, point.referencePopulation].map((population, k) => (
                <Td key={k} className="max-xl:hidden print:table-cell">
                  <span className="flex items-center gap-3">
                    <span className="w-9 shrink-0 text-right">{formatPopulation(population)}</span>
                    <span className="w-16 print:hidden">
                      <PopulationBar population={population} widest={widest} />
                    </span>
                  </span>
                </Td>
              ))}
            </Tr>
          ))}
        </tbody>
        {rest.length > 0 ? (
          <tfoot>
            <tr>
              <td colSpan={8} className="px-3 py-2 text-ink-2">
                {formatCount(rest.length)} more, {withUnit(sumOf(rest), "%")} of the reference population
                together
              </td>
            </tr>
          </tfoot>
        ) : null}
      </Table>
      {sorted.length > FIRST_ROWS ? (
        <p className="mt-2 text-xs">
          <TextButton onClick={() => setAll(!all)}>
            {all
              ? `Show the first ${FIRST_ROWS} only`
              : `Show ${plural(Math.min(sorted.length, MOST_ROWS), "row")}`}
          </TextButton>
        </p>
      ) : null}
    </section>
  );
}

const ORDERS: Record<Order, (a: Line, b: Line) => number> = {
  reference: (a, b) => a.point.reference - b.point.reference || a.point.place - b.point.place,
  level: (a, b) => a.point.level - b.point.level || a.point.place - b.point.place,
  deviation: (a, b) =>
    Math.abs(b.point.deviation) - Math.abs(a.point.deviation) || a.point.place - b.point.place,
  moves: (a, b) =>
    Math.abs(b.atLevel - b.atReference) - Math.abs(a.atLevel - a.atReference) ||
    a.atReference - b.atReference,
};

function movesWords(by: number): string {
  if (by === 0) return "same";
  return by > 0 ? `up ${formatCount(by)}` : `down ${formatCount(-by)}`;
}

function sumOf(lines: readonly Line[]): string {
  return fixed(
    lines.reduce((sum, { point }) => sum + percent(point.referencePopulation), 0),
    1,
  );
}

function csvOf(
  { level, reference }: Comparison,
  lines: readonly Line[],
  facts: readonly FigureFact[],
): string {
  const table = withFacts(
    [
      "conformer",
      "frame",
      `${level.name} [kcal/mol]`,
      `${reference.name} [kcal/mol]`,
      "deviation [kcal/mol]",
      `rank at ${level.name}`,
      `rank at ${reference.name}`,
      `population at ${level.name} [fraction]`,
      `population at ${reference.name} [fraction]`,
    ],
    lines.map(({ point, atLevel, atReference }) => [
      point.name,
      point.frame,
      point.level,
      point.reference,
      point.deviation,
      atLevel,
      atReference,
      point.levelPopulation,
      point.referencePopulation,
    ]),
    facts,
  );
  return toCsv(table.head, table.rows);
}

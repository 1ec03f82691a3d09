import { depthColour } from "~/components/ui/depth-strip";
import { formatEnergy, formatPopulation, formatRmsd, plural, withUnit } from "~/lib/format";
import type { ConformerRow } from "~/lib/workbench/conformers";
import { placeNames } from "~/lib/workbench/place-labels";
import { ChartFrame } from "./chart-frame";
import { foundByColumn, foundInNote, type Lit, litNote, PALE } from "./lit";
import { ChartText, type Choose, Plot, usePlot } from "./plot";

interface Point {
  row: ConformerRow;
  rmsd: number;
  energy: number;
}

const MOST_POINTS = 2000;
const NAMED = 4;

/** Relative energy against the RMSD to one conformer: are the low ones alike, or different shapes of like energy? */
export function EnergyAgainstRmsd({
  rows,
  rmsd,
  reference,
  top,
  selected,
  lit = null,
  onChoose,
  note,
}: {
  rows: readonly ConformerRow[];
  /** Å, by position in the set; null where not computed. */
  rmsd: ArrayLike<number | null | undefined>;
  /** Name of the conformer that distances are taken to. */
  reference: string;
  top: number;
  selected: ReadonlySet<number>;
  lit?: Lit | null;
  onChoose: Choose;
  note?: string;
}) {
  const points: Point[] = [];
  for (const row of rows) {
    const distance = rmsd[row.index];
    if (row.relativeEnergy === null || distance === null || distance === undefined) continue;
    if (row.relativeEnergy <= top) points.push({ row, rmsd: distance, energy: row.relativeEnergy });
  }
  // The most populated last, so that they lie on top; of very many the most populated are drawn.
  points.sort((a, b) => (a.row.population ?? 0) - (b.row.population ?? 0));
  const drawn = points.slice(-MOST_POINTS);
  const widest = drawn.reduce((most, point) => Math.max(most, point.rmsd), 0.1);
  const walk = [...drawn].sort((a, b) => a.rmsd - b.rmsd || a.energy - b.energy);
  const foundBy = foundByColumn(rows);
  return (
    <ChartFrame
      title={`Energy against RMSD to ${reference}`}
      fileName={`energy-against-rmsd-to-${reference}`}
      note={[litNote(lit), note].filter(Boolean).join(" ") || undefined}
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: `RMSD to ${reference}`, unit: "Å", digits: 3 },
          { name: "relative energy", unit: "kcal/mol", digits: 2 },
          { name: "population", unit: "%", digits: 1 },
          ...foundBy.head,
        ],
        rows: walk.map(({ row, rmsd: d, energy }) => [
          row.name,
          row.frame,
          d,
          energy,
          row.population === null ? null : 100 * row.population,
          ...foundBy.cell(row),
        ]),
      }}
    >
      <Plot
        label={`Relative energy against RMSD to ${reference} of ${plural(drawn.length, "conformer")}`}
        x={{ title: `RMSD to ${reference}, Å`, low: -0.04 * widest, high: 1.06 * widest }}
        y={{ title: "relative energy, kcal/mol", low: -0.045 * top, high: top }}
        points={walk.map(({ row, rmsd: d, energy }) => ({
          x: d,
          y: energy,
          frame: row.frame,
          label: `${row.name}, frame ${row.frame}: ${withUnit(formatRmsd(d), "Å")}, ${withUnit(formatEnergy(energy), "kcal/mol")}, ${withUnit(formatPopulation(row.population), "%")}${foundInNote(row)}`,
        }))}
        onChoose={onChoose}
      >
        <PointsLayer drawn={drawn} selected={selected} lit={lit} />
      </Plot>
    </ChartFrame>
  );
}

function PointsLayer({
  drawn,
  selected,
  lit,
}: {
  drawn: readonly Point[];
  selected: ReadonlySet<number>;
  lit: Lit | null;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const named = drawn
    .slice(-NAMED)
    .reverse()
    .map(({ row, rmsd, energy }) => ({ name: row.name, x: plot.x(rmsd), y: plot.y(energy) }));
  const labels = placeNames(named, { ...plot, right: plot.right + 8 });
  const radius = drawn.length > 300 ? 3 : 4.5;
  return (
    <g>
      {drawn.map(({ row, rmsd, energy }) => (
        <circle
          key={row.index}
          opacity={lit !== null && !lit.rows.has(row.index) ? PALE : undefined}
          cx={plot.x(rmsd)}
          cy={plot.y(energy)}
          r={radius}
          fill={depthColour(row.population ?? 0)}
          stroke={selected.has(row.frame) ? "var(--color-mark)" : "var(--color-ink)"}
          strokeWidth={selected.has(row.frame) ? 2.5 : 1}
        />
      ))}
      {labels.map(({ text, x, y, end }) => (
        <ChartText key={text} x={x} y={y} end={end} tone="ink" halo>
          {text}
        </ChartText>
      ))}
    </g>
  );
}

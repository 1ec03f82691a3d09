import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { formatEnergy, formatPopulation, formatRmsd, plural, withUnit } from "~/lib/format";
import type { OutsideRow } from "~/lib/outside/finding";

const MOST_POINTS = 2000;
const NAMED = 3;

/** Relative energy against the RMSD to the outside structure: is the pose near to what the flask holds? */
export function NearnessAgainstEnergy({
  rows,
  near,
  shown,
  onChoose,
}: {
  /** Nearest first. */
  rows: readonly OutsideRow[];
  /** Å */
  near: number;
  /** Frame laid over. */
  shown: number | null;
  onChoose: Choose;
}) {
  const known = rows.filter((row) => row.relativeEnergy !== null).slice(0, MOST_POINTS);
  const widest = known.reduce((most, row) => Math.max(most, row.rmsd), Math.max(0.1, near));
  const top = known.reduce((most, row) => Math.max(most, row.relativeEnergy ?? 0), 0.5) * 1.08;
  return (
    <ChartFrame
      title="Nearness against energy"
      fileName="nearness-against-energy"
      className="noscript:hidden"
      tableBeside
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: "RMSD", unit: "Å", digits: 3 },
          { name: "as" },
          { name: "relative energy", unit: "kcal/mol", digits: 2 },
          { name: "population", unit: "%", digits: 1 },
        ],
        rows: rows.map((row) => [
          row.name,
          row.frame,
          row.rmsd,
          row.mirror ? "mirror image" : "same hand",
          row.relativeEnergy,
          row.population === null ? null : 100 * row.population,
        ]),
      }}
    >
      <Plot
        label={`Relative energy of ${plural(known.length, "conformer")} against the RMSD to the outside structure`}
        height={300}
        x={{ title: "RMSD to the outside structure, Å", low: -0.04 * widest, high: 1.06 * widest }}
        y={{ title: "relative energy, kcal/mol", low: -0.045 * top, high: top }}
        points={known.map((row) => ({
          x: row.rmsd,
          y: row.relativeEnergy ?? 0,
          frame: row.frame,
          label: `${row.name}: ${withUnit(formatRmsd(row.rmsd), "Å")}, ${withUnit(formatEnergy(row.relativeEnergy), "kcal/mol")}, ${withUnit(formatPopulation(row.population), "%")}`,
        }))}
        onChoose={onChoose}
      >
        <Points rows={known} near={near} shown={shown} />
      </Plot>
    </ChartFrame>
  );
}

function Points({ rows, near, shown }: { rows: readonly OutsideRow[]; near: number; shown: number | null }) {
  const plot = usePlot();
  if (!plot) return null;
  const at = (row: OutsideRow) => ({ x: plot.x(row.rmsd), y: plot.y(row.relativeEnergy ?? 0) });
  const named = new Map<string, { x: number; y: number }>();
  const populated = [...rows].sort((a, b) => (b.population ?? 0) - (a.population ?? 0));
  for (const row of [...rows.filter(({ rmsd }) => rmsd <= near).slice(0, 5), ...populated.slice(0, NAMED)]) {
    const place = at(row);
    if (
      [...named.values()].every(
        (other) => Math.abs(other.x - place.x) > 26 || Math.abs(other.y - place.y) > 14,
      )
    )
      named.set(row.name, place);
  }
  const x = plot.x(near);
  const end = x > plot.left + 0.75 * (plot.right - plot.left);
  return (
    <g>
      {x <= plot.right ? (
        <>
          <path
            d={`M${x} ${plot.top}V${plot.bottom}`}
            stroke="var(--color-mark)"
            strokeWidth={1.2}
            strokeDasharray="5 4"
          />
          <ChartText x={x + (end ? -6 : 6)} y={plot.top + 10} end={end} tone="mark" halo>
            {`near: ${withUnit(formatRmsd(near), "Å")}`}
          </ChartText>
        </>
      ) : null}
      {[...rows].reverse().map((row) => (
        <circle
          key={row.index}
          cx={at(row).x}
          cy={at(row).y}
          r={rows.length > 300 ? 3 : 4.5}
          fill={depthColour(row.population ?? 0)}
          stroke={row.frame === shown ? "var(--color-mark)" : "var(--color-ink)"}
          strokeWidth={row.frame === shown ? 2.5 : 1}
        />
      ))}
      {[...named].map(([name, place]) => (
        <ChartText key={name} x={place.x + 8} y={place.y - 6} tone="ink" halo>
          {name}
        </ChartText>
      ))}
    </g>
  );
}

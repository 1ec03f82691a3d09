import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { formatPercent, plural } from "~/lib/format";
import { PairLayer } from "./pair-layer";
import { drawnPoints, type PairPoint, percent, pointWords } from "./pair-points";
import type { Comparison } from "./use-comparison";

/** Population at one level against the other; on the line both agree. */
export function PopulationAgainstPopulation({
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
  const { level, reference, comparison } = found;
  const drawn = drawnPoints(points);
  const most = points.reduce((top, p) => Math.max(top, p.levelPopulation, p.referencePopulation), 0.01);
  const top = Math.min(104, 108 * most);
  const named = [...drawn]
    .sort(
      (a, b) =>
        Math.max(b.levelPopulation, b.referencePopulation) -
        Math.max(a.levelPopulation, a.referencePopulation),
    )
    .slice(0, 6);
  return (
    <ChartFrame
      title="Population against population"
      fileName="population-against-population"
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: `population at ${level.name}`, unit: "%", digits: 1 },
          { name: `population at ${reference.name}`, unit: "%", digits: 1 },
        ],
        rows: points.map((p) => [
          p.name,
          p.frame,
          percent(p.levelPopulation),
          percent(p.referencePopulation),
        ]),
      }}
    >
      <Plot
        label={`Populations of ${plural(drawn.length, "conformer")} at two levels, which share ${formatPercent(comparison.populationOverlap)}`}
        x={{ title: `${level.name}, %`, low: -0.04 * top, high: top, ordinal: level.ordinal }}
        y={{ title: `${reference.name}, %`, low: -0.04 * top, high: top, ordinal: reference.ordinal }}
        points={[...drawn].reverse().map((p) => ({
          x: percent(p.levelPopulation),
          y: percent(p.referencePopulation),
          frame: p.frame,
          label: pointWords(p, level.name, reference.name),
        }))}
        onChoose={onChoose}
      >
        <IdentityLayer top={top} overlap={comparison.populationOverlap} />
        <PairLayer
          points={drawn}
          x={(p) => percent(p.levelPopulation)}
          y={(p) => percent(p.referencePopulation)}
          selected={selected}
          named={named.map((point) => ({ point, text: point.name }))}
        />
      </Plot>
    </ChartFrame>
  );
}

function IdentityLayer({ top, overlap }: { top: number; overlap: number }) {
  const plot = usePlot();
  if (!plot) return null;
  return (
    <g>
      <path
        d={`M${plot.x(0)} ${plot.y(0)}L${plot.x(top)} ${plot.y(top)}`}
        stroke="var(--color-ink-3)"
        strokeWidth={1.2}
      />
      <ChartText x={plot.right - 4} y={plot.bottom - 8} end halo>
        shared: {formatPercent(overlap, 1)}
      </ChartText>
    </g>
  );
}

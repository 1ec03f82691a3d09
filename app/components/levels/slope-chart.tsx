import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { formatCount, plural } from "~/lib/format";
import { placeRanks } from "~/lib/stats/ranks";
import { rankTicks } from "~/lib/workbench/ticks";
import { type PairPoint, percent } from "./pair-points";
import type { Comparison } from "./use-comparison";

/** Lines that can still be told apart. */
const MOST_LINES = 24;

interface Slope {
  point: PairPoint;
  atLevel: number;
  atReference: number;
}

/** How the ranking moves from one level to the other: a line a conformer, rank 1 on top. */
export function SlopeChart({
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
  const { level, reference, paired } = found;
  const atLevel = placeRanks(paired.level);
  const atReference = placeRanks(paired.reference);
  const slopes = points
    .map((point) => ({
      point,
      atLevel: atLevel[point.place] ?? 0,
      atReference: atReference[point.place] ?? 0,
    }))
    .sort((a, b) => a.atReference - b.atReference || a.atLevel - b.atLevel);
  const shown = slopes.slice(0, MOST_LINES);
  const most = shown.reduce((deep, s) => Math.max(deep, s.atLevel, s.atReference), 1);
  return (
    <ChartFrame
      title="How the ranking moves"
      fileName="how-the-ranking-moves"
      note={
        slopes.length > shown.length
          ? `The ${shown.length} lowest at ${reference.name}; ${plural(slopes.length - shown.length, "more conformer")} in the table.`
          : undefined
      }
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: `rank at ${level.name}`, digits: 0 },
          { name: `rank at ${reference.name}`, digits: 0 },
          { name: "population at the reference", unit: "%", digits: 1 },
        ],
        rows: slopes.map((s) => [
          s.point.name,
          s.point.frame,
          s.atLevel,
          s.atReference,
          percent(s.point.referencePopulation),
        ]),
      }}
    >
      <Plot
        height={Math.min(560, Math.max(260, 90 + 13 * Math.min(most, 32)))}
        label={`Ranks of ${plural(shown.length, "conformer")} at ${level.name} and at ${reference.name}`}
        x={{
          title: "",
          low: -0.28,
          high: 1.28,
          ticks: [0, 1],
          tickText: (value) => (value === 0 ? level.name : reference.name),
        }}
        y={{
          title: "rank, 1 is the lowest",
          low: -most - 0.5,
          high: -0.5,
          ticks: rankTicks(most)
            .map((rank) => -rank)
            .reverse(),
          tickText: (value) => formatCount(-value),
        }}
        points={shown.map((s) => ({
          x: 1,
          y: -s.atReference,
          frame: s.point.frame,
          label: `${s.point.name}: rank ${s.atLevel} at ${level.name}, ${s.atReference} at ${reference.name}`,
        }))}
        onChoose={onChoose}
      >
        <SlopeLayer slopes={shown} selected={selected} />
      </Plot>
    </ChartFrame>
  );
}

function SlopeLayer({ slopes, selected }: { slopes: readonly Slope[]; selected: ReadonlySet<number> }) {
  const plot = usePlot();
  if (!plot) return null;
  const left = plot.x(0);
  const right = plot.x(1);
  return (
    <g>
      {slopes.map(({ point, atLevel, atReference }) => {
        const chosen = selected.has(point.frame);
        return (
          <path
            key={point.frame}
            d={`M${left} ${plot.y(-atLevel)}L${right} ${plot.y(-atReference)}`}
            stroke={chosen ? "var(--color-mark)" : "var(--color-ink-3)"}
            strokeWidth={chosen ? 2.2 : 1 + 2.5 * point.referencePopulation}
          />
        );
      })}
      {slopes.flatMap(({ point, atLevel, atReference }) =>
        [
          { x: left, rank: atLevel, end: true },
          { x: right, rank: atReference, end: false },
        ].map(({ x, rank, end }) => (
          <g key={`${point.frame}-${end}`}>
            <circle
              cx={x}
              cy={plot.y(-rank)}
              r={4}
              fill={depthColour(end ? point.levelPopulation : point.referencePopulation)}
              stroke={selected.has(point.frame) ? "var(--color-mark)" : "var(--color-ink)"}
            />
            {roomy(plot) ? (
              <ChartText x={end ? x - 8 : x + 8} y={plot.y(-rank) + 4} end={end} tone="ink" halo>
                {point.name}
              </ChartText>
            ) : null}
          </g>
        )),
      )}
    </g>
  );
}

/** Whether the rows stand far enough apart for names. */
function roomy(plot: NonNullable<ReturnType<typeof usePlot>>): boolean {
  return Math.abs(plot.y(-2) - plot.y(-1)) >= 11;
}

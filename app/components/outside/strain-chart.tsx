import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { formatEnergy } from "~/lib/format";
import type { OutsideRow } from "~/lib/outside/finding";

/** Where the strain sits: the nearest conformer above the lowest, and the structure above that. */
export function StrainChart({
  level,
  nearest,
  strain,
  note,
}: {
  level: string;
  nearest: OutsideRow & { relativeEnergy: number };
  /** kcal/mol above the lowest. */
  strain: number;
  note: string;
}) {
  const low = Math.min(0, strain);
  const high = Math.max(strain, nearest.relativeEnergy, 0.5);
  const bars = [
    { words: "lowest", from: 0, to: 0, population: null },
    {
      words: `${nearest.name}, nearest`,
      from: 0,
      to: nearest.relativeEnergy,
      population: nearest.population ?? 0,
    },
    { words: "the structure as it stands", from: nearest.relativeEnergy, to: strain, population: null },
  ];
  return (
    <ChartFrame
      title="Where the strain sits"
      fileName="strain"
      note={note}
      data={{
        columns: [{ name: "what" }, { name: "energy above the lowest", unit: "kcal/mol", digits: 2 }],
        rows: bars.map((bar) => [bar.words, bar.to]),
      }}
    >
      <Plot
        label={`Energy above the lowest at ${level}: ${bars.map((bar) => `${bar.words} ${formatEnergy(bar.to)}`).join(", ")} kcal/mol`}
        height={200}
        axisWidth={4}
        x={{ title: `energy at ${level}, kcal/mol`, low: low - 0.02 * high, high: high * 1.18 }}
        y={{ title: "", low: 0, high: 3, ticks: [] }}
        points={bars.map((bar, k) => ({
          x: bar.to,
          y: 2.3 - k,
          label: `${bar.words}: ${formatEnergy(bar.to)} kcal/mol`,
        }))}
      >
        <Bars bars={bars} />
      </Plot>
    </ChartFrame>
  );
}

function Bars({
  bars,
}: {
  bars: readonly { words: string; from: number; to: number; population: number | null }[];
}) {
  const plot = usePlot();
  if (!plot) return null;
  return (
    <g>
      {bars.map((bar, k) => {
        const y = plot.y(2.3 - k);
        const [left, right] = [plot.x(Math.min(bar.from, bar.to)), plot.x(Math.max(bar.from, bar.to))];
        return (
          <g key={bar.words}>
            <ChartText x={left} y={y - 12} tone="ink">
              {bar.words}
            </ChartText>
            <rect
              x={left}
              y={y - 5}
              width={Math.max(0.5, right - left)}
              height={10}
              fill={bar.population === null ? "var(--color-paper)" : depthColour(bar.population)}
              stroke={bar.population === null && right > left ? "var(--color-ink-3)" : "none"}
            />
            <path d={`M${plot.x(bar.to)} ${y - 6}v12`} stroke="var(--color-ink)" strokeWidth={1.5} />
            <ChartText x={Math.max(left, right) + 6} y={y + 4}>
              {formatEnergy(bar.to)}
            </ChartText>
          </g>
        );
      })}
    </g>
  );
}

import { type ChartRow, RowChart } from "~/components/averages/row-chart";
import { ChartFrame } from "~/components/charts/chart-frame";
import { depthColour } from "~/components/ui/depth-strip";
import { fixed, formatPercent, plural } from "~/lib/format";
import type { PopulationError } from "~/lib/trust/population-error";

const MOST = 10;

/** Populations with how far the level's error moves them: computed, median of the draws, 95 % range, share as the lowest. */
export function PopulationBands({
  names,
  frames,
  populations,
  drawn,
  selected,
  onChoose,
}: {
  names: readonly string[];
  frames: readonly number[];
  populations: Float64Array;
  drawn: PopulationError;
  selected: ReadonlySet<number>;
  onChoose: (frame: number) => void;
}) {
  const order = [...names.keys()].sort((a, b) => (populations[b] ?? 0) - (populations[a] ?? 0) || a - b);
  const shown = order.slice(0, MOST);
  const figure = (place: number) => drawn.populations[place];
  const high =
    104 *
    Math.max(0.02, ...shown.map((place) => Math.max(figure(place)?.high ?? 0, populations[place] ?? 0)));
  const rows = shown.map((place): ChartRow => {
    const name = names[place] ?? "";
    const frame = frames[place] ?? 0;
    const range = figure(place);
    const computed = populations[place] ?? 0;
    const lowest = drawn.lowestShare[place] ?? 0;
    return {
      key: name,
      label: name,
      after: [fixed(100 * lowest, 1)],
      selected: selected.has(frame),
      words: `${name}: ${formatPercent(computed, 1)} as computed, 95 % of the draws from ${formatPercent(range?.low ?? null, 1)} to ${formatPercent(range?.high ?? null, 1)}, lowest in ${formatPercent(lowest, 1)}`,
      onChoose: () => onChoose(frame),
      draw: ({ x }, y) =>
        range ? (
          <g stroke="var(--color-ink-3)" strokeWidth={1.5}>
            <path d={`M${x(100 * range.low)} ${y}H${x(100 * range.high)}`} />
            <path d={`M${x(100 * range.low)} ${y - 4}v8M${x(100 * range.high)} ${y - 4}v8`} />
            <path d={`M${x(100 * range.median)} ${y - 7}v14`} stroke="var(--color-ink)" />
            <circle
              cx={x(100 * computed)}
              cy={y}
              r={5}
              fill={depthColour(computed)}
              stroke="var(--color-ink)"
              strokeWidth={1}
            />
          </g>
        ) : null,
    };
  });
  const rest = order.length - shown.length;
  return (
    <ChartFrame
      title="Populations, and how far the level moves them"
      fileName="population-ranges"
      note={`Point: as computed. Long tick: median of the draws. Line: 95 % range.${rest > 0 ? ` ${plural(rest, "further conformer")} in the table.` : ""}`}
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: "population as computed", unit: "%", digits: 1 },
          { name: "mean of the draws", unit: "%", digits: 1 },
          { name: "standard deviation", unit: "%", digits: 1 },
          { name: "2.5 %", unit: "%", digits: 1 },
          { name: "median", unit: "%", digits: 1 },
          { name: "97.5 %", unit: "%", digits: 1 },
          { name: "lowest in", unit: "%", digits: 1 },
        ],
        rows: order.map((place) => {
          const range = figure(place);
          const percent = (value: number | undefined) => (value === undefined ? null : 100 * value);
          return [
            names[place] ?? "",
            frames[place] ?? null,
            percent(populations[place]),
            percent(range?.mean),
            percent(range?.sd),
            percent(range?.low),
            percent(range?.median),
            percent(range?.high),
            percent(drawn.lowestShare[place]),
          ];
        }),
      }}
    >
      <RowChart
        label="Populations with their 95 % range from the error of the level"
        rows={rows}
        high={high}
        axis="population, %"
        afterWidth={64}
        heads={{ after: ["lowest in, %"] }}
      />
    </ChartFrame>
  );
}

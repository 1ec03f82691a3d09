import { formatEnergy, formatPercent, plural, withUnit } from "~/lib/format";
import { type Cumulative, withinWindow } from "~/lib/workbench/cumulative";
import { shareWords } from "~/lib/workbench/findings";
import { ChartFrame } from "./chart-frame";
import { ChartText, Plot, usePlot } from "./plot";

/** Population within an energy window against the window: how wide to carry for a share. */
export function CumulativePopulation({
  cumulative,
  windowKcal,
  top,
}: {
  cumulative: Cumulative;
  windowKcal: number | null;
  /** Upper end of the energy axis, the same as the ladder's. */
  top: number;
}) {
  const within = withinWindow(cumulative, windowKcal);
  const shown = cumulative.steps.filter((step) => step.energy <= top);
  return (
    <ChartFrame
      title="Cumulative population"
      fileName="cumulative-population"
      data={{
        columns: [
          { name: "window", unit: "kcal/mol", digits: 2 },
          { name: "conformers", digits: 0 },
          { name: "population within", unit: "%", digits: 2 },
        ],
        rows: cumulative.steps.map((step) => [step.energy, step.count, 100 * step.share]),
      }}
    >
      <Plot
        label={`Population within an energy window: ${cumulative.readings
          .map((r) => `${formatPercent(r.asked)} within ${withUnit(formatEnergy(r.energy), "kcal/mol")}`)
          .join(
            ", ",
          )}${windowKcal === null ? "" : `; the window of ${formatEnergy(windowKcal)} holds ${shareWords(within.share)}`}`}
        x={{ title: "window, kcal/mol", low: -0.02 * top, high: top }}
        y={{ title: "population within the window, %", low: 0, high: 102, ticks: [0, 25, 50, 75, 100] }}
        points={shown.map((step) => ({
          x: step.energy,
          y: 100 * step.share,
          label: `${withUnit(formatEnergy(step.energy), "kcal/mol")}: ${plural(step.count, "conformer")}, ${formatPercent(step.share, 1)}`,
        }))}
      >
        <CumulativeLayer cumulative={cumulative} shown={shown} windowKcal={windowKcal} top={top} />
      </Plot>
    </ChartFrame>
  );
}

function CumulativeLayer({
  cumulative,
  shown,
  windowKcal,
  top,
}: {
  cumulative: Cumulative;
  shown: Cumulative["steps"];
  windowKcal: number | null;
  top: number;
}) {
  const plot = usePlot();
  const first = shown[0];
  if (!plot || !first) return null;
  const zero = plot.y(0);
  let line = `M${plot.x(first.energy).toFixed(1)} ${zero}`;
  for (const step of shown)
    line += `H${plot.x(step.energy).toFixed(1)}V${plot.y(100 * step.share).toFixed(1)}`;
  line += `H${plot.right}`;
  const readings = cumulative.readings.filter((reading) => reading.energy <= top);
  const narrow = plot.right - plot.left < 340;
  return (
    <g>
      <path d={`${line}V${zero}Z`} fill="var(--color-depth-1)" fillOpacity={0.5} />
      <path d={line} fill="none" stroke="var(--color-depth-6)" strokeWidth={1.75} />
      {windowKcal !== null && windowKcal < top ? (
        <>
          <path
            d={`M${plot.x(windowKcal)} ${plot.top}V${plot.bottom}`}
            stroke="var(--color-mark)"
            strokeDasharray="5 4"
          />
          <ChartText x={plot.x(windowKcal) - 6} y={plot.bottom - 10} end tone="mark" halo>
            window {formatEnergy(windowKcal)}
          </ChartText>
        </>
      ) : null}
      {readings.map((reading) => (
        <circle
          key={reading.asked}
          cx={plot.x(reading.energy)}
          cy={plot.y(100 * reading.share)}
          r={4}
          fill="var(--color-paper)"
          stroke="var(--color-ink)"
        />
      ))}
      <Readings plot={plot} cumulative={cumulative} windowKcal={windowKcal} narrow={narrow} />
    </g>
  );
}

/** The four shares as a small table in the corner that the curve leaves free: it climbs at the left. */
function Readings({
  plot,
  cumulative,
  windowKcal,
  narrow,
}: {
  plot: NonNullable<ReturnType<typeof usePlot>>;
  cumulative: Cumulative;
  windowKcal: number | null;
  narrow: boolean;
}) {
  // Left of the window's line where there is room for it.
  const edge =
    windowKcal !== null && plot.x(windowKcal) < plot.right ? plot.x(windowKcal) - 14 : plot.right - 14;
  const right = edge - plot.left > 250 ? edge : plot.right - (narrow ? 2 : 14);
  const columns = [right - 130, right - 74, right] as const;
  const top = plot.top + (plot.bottom - plot.top) * (narrow ? 0.46 : 0.34);
  const heads = ["share", "window", "conformers"];
  return (
    <g>
      {heads.map((head, k) => (
        <ChartText key={head} x={columns[k] ?? right} y={top} end>
          {head}
        </ChartText>
      ))}
      <path d={`M${columns[0] - 34} ${top + 7}H${right}`} stroke="var(--color-rule-2)" />
      {cumulative.readings.map((reading, row) => {
        const y = top + 24 + 20 * row;
        return (
          <g key={reading.asked}>
            <ChartText x={columns[0]} y={y} end tone="ink">
              {formatPercent(reading.asked)}
            </ChartText>
            <ChartText x={columns[1]} y={y} end tone="ink">
              {formatEnergy(reading.energy)}
            </ChartText>
            <ChartText x={columns[2]} y={y} end tone="ink">
              {reading.count}
            </ChartText>
          </g>
        );
      })}
    </g>
  );
}

import {
  formatCount,
  formatEnergy,
  formatPercent,
  formatWindowToCarry,
  plural,
  withUnit,
} from "~/lib/format";
import { type Cumulative, withinWindow } from "~/lib/workbench/cumulative";
import { shareFigure } from "~/lib/workbench/findings";
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
          { name: "population within", unit: "%", digits: 1 },
        ],
        rows: cumulative.steps.map((step) => [step.energy, step.count, 100 * step.share]),
      }}
    >
      <Plot
        label={`Population within an energy window: ${cumulative.readings
          .map(
            (r) =>
              `${formatPercent(r.asked)} within ${withUnit(windowDigits(cumulative, r.energy), "kcal/mol")}`,
          )
          .join(
            ", ",
          )}${windowKcal === null ? "" : `; the window of ${formatEnergy(windowKcal)} holds ${shareFigure(within.share)}`}`}
        x={{ title: "window, kcal/mol", low: -0.02 * top, high: top }}
        y={{ title: "population within the window, %", low: 0, high: 102, ticks: [0, 25, 50, 75, 100] }}
        points={shown.map((step) => ({
          x: step.energy,
          y: 100 * step.share,
          label: `${withUnit(windowDigits(cumulative, step.energy), "kcal/mol")}: ${plural(step.count, "conformer")}, ${formatPercent(step.share, 1)}`,
        }))}
      >
        <CumulativeLayer cumulative={cumulative} shown={shown} windowKcal={windowKcal} top={top} />
      </Plot>
      <Readings cumulative={cumulative} />
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
    </g>
  );
}

/** A window in digits that hold what is said of it. */
function windowDigits({ steps }: Cumulative, energy: number): string {
  return formatWindowToCarry(energy, steps.find((step) => step.energy > energy)?.energy);
}

/** The four shares as a small table below the figure: inside, curve and window cross it for one ensemble or another. */
function Readings({ cumulative }: { cumulative: Cumulative }) {
  return (
    <table className="mt-2 text-xs">
      <caption className="sr-only">Window and conformers that hold a share of the population</caption>
      <thead className="text-ink-3">
        <tr>
          {["share", "window, kcal/mol", "conformers"].map((head) => (
            <th key={head} scope="col" className="py-1 pr-6 text-right font-normal">
              {head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {cumulative.readings.map((reading) => (
          <tr key={reading.asked} className="border-rule border-t">
            <th scope="row" className="py-1 pr-6 text-right font-medium">
              {formatPercent(reading.asked)}
            </th>
            <td className="py-1 pr-6 text-right">{windowDigits(cumulative, reading.energy)}</td>
            <td className="py-1 pr-6 text-right">{formatCount(reading.count)}</td>
          </tr>
        ))}
      </tbody>
    </table>
  );
}

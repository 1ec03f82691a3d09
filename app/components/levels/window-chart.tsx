import { ChartFrame } from "~/components/charts/chart-frame";
import { FigureFacts } from "~/components/charts/figure-facts";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { levelColour } from "~/components/ui/level-marker";
import { useWorkbench } from "~/components/workbench/workbench-context";
import { formatCount, formatPercent, formatWindowToCarry, plural, withUnit } from "~/lib/format";
import { nextWindow, type WindowReading, type WindowStep } from "~/lib/levels/window";
import type { WindowBand } from "~/lib/levels/window-band";
import { shareWords } from "~/lib/workbench/findings";
import type { Comparison } from "./use-comparison";

/** Reference population that a window at the level keeps; its files say how the band behind it was drawn. */
export function WindowChart(props: { found: Comparison; band: WindowBand | null }) {
  const { found, band } = props;
  const { sigmaKcal } = useWorkbench().state.compare;
  return (
    <FigureFacts
      facts={
        band
          ? [
              { name: `error of ${found.reference.name}`, unit: "kcal/mol", value: sigmaKcal },
              { name: "draws", value: band.draws },
              { name: "generator", value: band.generator },
              { name: "seed", value: band.seed },
            ]
          : []
      }
    >
      <WindowFigure {...props} />
    </FigureFacts>
  );
}

/** With drop lines where it reaches 90, 95 and 99 %. */
function WindowFigure({ found, band }: { found: Comparison; band: WindowBand | null }) {
  const { level, reference, comparison, steps, window } = found;
  const last = steps.at(-1)?.kcal ?? 0;
  const needed = Math.max(window.kcal, comparison.window[2]?.kcal ?? 0);
  const top = Math.max(0.5, steps.length <= 60 ? 1.03 * last : Math.min(1.03 * last, 1.25 * needed));
  const shown = steps.filter((step) => step.kcal <= top);
  const readings = comparison.window.filter((r) => r.share !== window.share);
  return (
    <ChartFrame
      title="What a window keeps"
      fileName="what-a-window-keeps"
      data={{
        columns: [
          { name: `window at ${level.name}`, unit: "kcal/mol", digits: 2 },
          { name: "conformers", digits: 0 },
          { name: "population kept", unit: "%", digits: 2 },
          ...(band
            ? [
                { name: "2.5 % of the draws below", unit: "%", digits: 1 },
                { name: "97.5 % of the draws below", unit: "%", digits: 1 },
                { name: "lowest kept", unit: "% of the draws", digits: 1 },
              ]
            : []),
        ],
        rows: steps.map((step, k) => [
          step.kcal,
          step.count,
          100 * step.kept,
          ...(band
            ? [
                100 * (band.steps[k]?.low ?? 0),
                100 * (band.steps[k]?.high ?? 0),
                100 * (band.steps[k]?.lowestKept ?? 0),
              ]
            : []),
        ]),
      }}
    >
      <Plot
        height={400}
        label={`Population of ${reference.name} within a window at ${level.name}: ${comparison.window
          .map(
            (r) =>
              `${formatPercent(r.share)} within ${withUnit(formatWindowToCarry(r.kcal, nextWindow(steps, r.kcal)), "kcal/mol")}`,
          )
          .join(", ")}`}
        x={{
          title: `window at ${level.name}, kcal/mol`,
          low: -0.02 * top,
          high: top,
          ordinal: level.ordinal,
        }}
        y={{
          title: `${reference.name} population kept, %`,
          low: 0,
          high: 102,
          ticks: [0, 25, 50, 75, 100],
          ordinal: reference.ordinal,
        }}
        points={shown.map((step) => ({
          x: step.kcal,
          y: 100 * step.kept,
          label: `${withUnit(formatWindowToCarry(step.kcal, nextWindow(steps, step.kcal)), "kcal/mol")}: ${plural(step.count, "conformer")}, ${formatPercent(step.kept, 1)} kept`,
        }))}
      >
        <CurveLayer
          shown={shown}
          band={band?.steps.filter((step) => step.kcal <= top) ?? null}
          colour={levelColour(reference.ordinal)}
          readings={readings}
          chosen={window}
          top={top}
        />
      </Plot>
    </ChartFrame>
  );
}

function CurveLayer({
  shown,
  band,
  colour,
  readings,
  chosen,
  top,
}: {
  shown: readonly WindowStep[];
  band: WindowBand["steps"] | null;
  colour: string;
  readings: readonly WindowReading[];
  chosen: WindowReading;
  top: number;
}) {
  const plot = usePlot();
  const first = shown[0];
  if (!plot || !first) return null;
  const zero = plot.y(0);
  const staircase = (values: readonly { kcal: number; y: number }[]) =>
    values.map(({ kcal, y }) => `H${plot.x(kcal).toFixed(1)}V${plot.y(100 * y).toFixed(1)}`).join("");
  const line = `M${plot.x(first.kcal).toFixed(1)} ${zero}${staircase(shown.map(({ kcal, kept }) => ({ kcal, y: kept })))}H${plot.right}`;
  return (
    <g>
      <path d={`${line}V${zero}Z`} fill="var(--color-depth-1)" fillOpacity={0.5} />
      {band && band.length > 0 ? (
        <path d={bandPath(band, plot)} fill="var(--color-ink-3)" fillOpacity={0.22} />
      ) : null}
      <path d={line} fill="none" stroke={colour} strokeWidth={1.75} />
      <DropLines readings={readings} chosen={chosen} shown={shown} top={top} />
    </g>
  );
}

/** The area between two staircases: there along the upper, back along the lower. */
function bandPath(band: WindowBand["steps"], plot: NonNullable<ReturnType<typeof usePlot>>): string {
  const x = (k: number) => (band[k] ? plot.x(band[k].kcal) : plot.right).toFixed(1);
  const y = (share: number) => plot.y(100 * share).toFixed(1);
  let path = `M${x(0)} ${y(band[0]?.low ?? 0)}`;
  for (const [k, step] of band.entries()) path += `L${x(k)} ${y(step.high)}H${x(k + 1)}`;
  for (let k = band.length - 1; k >= 0; k--) path += `L${x(k + 1)} ${y(band[k]?.low ?? 0)}H${x(k)}`;
  return `${path}Z`;
}

/** From each reading down to its words: share, energy, count. They stand under each other so that none meets another. */
function DropLines({
  readings,
  chosen,
  shown,
  top,
}: {
  readings: readonly WindowReading[];
  chosen: WindowReading;
  shown: readonly WindowStep[];
  top: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const all = [...readings.map((r) => ({ ...r, mark: false })), { ...chosen, mark: true }]
    .filter((r) => r.kcal <= top)
    .sort((a, b) => a.kcal - b.kcal || a.share - b.share);
  const height = plot.bottom - plot.top;
  return (
    <>
      {all.map((reading, k) => {
        const kept = shown.find((step) => step.kcal === reading.kcal)?.kept ?? reading.share;
        const x = plot.x(reading.kcal);
        const y = plot.y(100 * kept);
        // The leftmost reading goes lowest: its words then have the room to the right below the others.
        const foot = plot.bottom - 44 - ((all.length - 1 - k) * (height - 130)) / Math.max(1, all.length);
        const width = `${formatWindowToCarry(reading.kcal, nextWindow(shown, reading.kcal))} kcal/mol`;
        const count = plural(reading.count, "conformer");
        const { end, lines } = beside(x, `${width}, ${count}`, [width, count], plot);
        const colour = reading.mark ? "var(--color-mark)" : "var(--color-ink-3)";
        return (
          <g key={`${reading.share}-${reading.mark}`}>
            <path
              d={`M${x} ${y}V${foot}`}
              stroke={colour}
              strokeDasharray={reading.mark ? "5 4" : undefined}
            />
            <circle
              cx={x}
              cy={y}
              r={4}
              fill={reading.mark ? "var(--color-mark)" : "var(--color-paper)"}
              stroke={reading.mark ? "var(--color-mark)" : "var(--color-ink)"}
            />
            <ChartText x={end ? x - 4 : x + 4} y={foot} end={end} tone={reading.mark ? "mark" : "ink"} halo>
              {shareWords(reading.share)}
            </ChartText>
            {lines.map((line, row) => (
              <ChartText
                key={line}
                x={end ? x - 4 : x + 4}
                y={foot + 15 * (row + 1)}
                end={end}
                tone={reading.mark ? "mark" : "plain"}
                halo
              >
                {line}
              </ChartText>
            ))}
          </g>
        );
      })}
    </>
  );
}

/** Width of a letter of the small chart text, px: an upper estimate. */
const LETTER = 6.2;

/** Words beside a line at x: to its right in one line, else to its left, else broken on the side with more room. */
function beside(
  x: number,
  whole: string,
  broken: readonly string[],
  { left, right }: { left: number; right: number },
): { end: boolean; lines: readonly string[] } {
  const room = LETTER * whole.length;
  if (x + room <= right) return { end: false, lines: [whole] };
  if (x - room >= left) return { end: true, lines: [whole] };
  return { end: x - left > right - x, lines: broken };
}

/** "21 of 31 conformers". */
export function countOf(count: number, all: number): string {
  return `${formatCount(count)} of ${plural(all, "conformer")}`;
}

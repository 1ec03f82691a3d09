import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { formatPercent, formatWindowToCarry, plural, withUnit } from "~/lib/format";
import { nextWindow } from "~/lib/levels/window";
import { bandWithin, type WindowBand } from "~/lib/levels/window-band";

/** Population kept at the end against the first window, with its 95 % range behind. */
export function FirstWindowChart({
  band,
  windowKcal,
  figure,
  startName,
  ordinal,
  lastName,
}: {
  band: WindowBand;
  /** null carries all. */
  windowKcal: number | null;
  /** The window in digits. */
  figure: string;
  startName: string;
  ordinal: number;
  lastName: string;
}) {
  const last = band.steps.at(-1)?.kcal ?? 0;
  const needed = Math.max(windowKcal ?? 0, band.readings.at(-1)?.high ?? 0);
  const top = Math.max(0.5, Math.min(1.03 * last, 1.25 * needed));
  const shown = band.steps.filter((step) => step.kcal <= top);
  const at = windowKcal === null ? null : bandWithin(band, windowKcal);
  return (
    <ChartFrame
      title="What the first window keeps"
      fileName="what-the-first-window-keeps"
      data={{
        columns: [
          { name: `window at ${startName}`, unit: "kcal/mol", digits: 2 },
          { name: "conformers", digits: 0 },
          { name: "population kept", unit: "%", digits: 1 },
          { name: "2.5 % of the draws below", unit: "%", digits: 1 },
          { name: "97.5 % of the draws below", unit: "%", digits: 1 },
        ],
        rows: band.steps.map((s) => [s.kcal, s.count, 100 * s.mean, 100 * s.low, 100 * s.high]),
      }}
    >
      <Plot
        height={360}
        label={`Population of ${lastName} that a window at ${startName} keeps`}
        x={{ title: `window at ${startName}, kcal/mol`, low: -0.02 * top, high: top, ordinal }}
        y={{
          title: `population kept at ${lastName}, expected, %`,
          low: 0,
          high: 102,
          ticks: [0, 25, 50, 75, 100],
        }}
        points={shown.map((s) => ({
          x: s.kcal,
          y: 100 * s.mean,
          label: `${withUnit(formatWindowToCarry(s.kcal, nextWindow(band.steps, s.kcal)), "kcal/mol")}: ${plural(s.count, "conformer")}, ${formatPercent(s.mean, 1)} kept, ${formatPercent(s.low)} to ${formatPercent(s.high)}`,
        }))}
      >
        <StepLayer shown={shown} at={at} windowKcal={windowKcal} figure={figure} top={top} />
      </Plot>
    </ChartFrame>
  );
}

function StepLayer({
  shown,
  at,
  windowKcal,
  figure,
  top,
}: {
  shown: WindowBand["steps"];
  at: WindowBand["steps"][number] | null;
  windowKcal: number | null;
  /** The window in digits. */
  figure: string;
  top: number;
}) {
  const plot = usePlot();
  const first = shown[0];
  if (!plot || !first) return null;
  const x = (k: number) => (shown[k] ? plot.x(shown[k].kcal) : plot.right).toFixed(1);
  const y = (share: number) => plot.y(100 * share).toFixed(1);
  let area = `M${x(0)} ${y(first.low)}`;
  for (const [k, step] of shown.entries()) area += `L${x(k)} ${y(step.high)}H${x(k + 1)}`;
  for (let k = shown.length - 1; k >= 0; k--) area += `L${x(k + 1)} ${y(shown[k]?.low ?? 0)}H${x(k)}`;
  const line = `M${x(0)} ${plot.y(0)}${shown.map((s, k) => `H${x(k)}V${y(s.mean)}`).join("")}H${plot.right}`;
  const px = windowKcal === null ? null : plot.x(windowKcal);
  const end = px !== null && px > (plot.left + plot.right) / 2;
  return (
    <g>
      <path d={`${area}Z`} fill="var(--color-rule)" />
      <path d={line} fill="none" stroke="var(--color-ink)" strokeWidth={1.75} />
      {px !== null && windowKcal !== null && windowKcal <= top && at ? (
        <>
          <path d={`M${px} ${plot.top}V${plot.bottom}`} stroke="var(--color-mark)" strokeDasharray="5 4" />
          <circle cx={px} cy={plot.y(100 * at.mean)} r={4} fill="var(--color-mark)" />
          {[
            `${figure}, ${plural(at.count, "conformer")}`,
            `keeps ${formatPercent(at.mean, 1)}`,
            `95 % range ${(100 * at.low).toFixed(1)} to ${(100 * at.high).toFixed(1)}`,
          ].map((text, k) => (
            <ChartText
              key={text}
              x={end ? px - 8 : px + 8}
              y={(plot.top + plot.bottom) / 2 + 16 * k}
              end={end}
              tone={k === 0 ? "mark" : "plain"}
              halo
            >
              {text}
            </ChartText>
          ))}
        </>
      ) : null}
    </g>
  );
}

import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { fixed, formatCount, plural } from "~/lib/format";
import { type Coverage, rarefied } from "~/lib/trust/sampling-coverage";

const POINTS = 60;

/** Distinct conformers against frames: what so many would have found, on to twice as many, and how many there may be. */
export function RarefactionChart({ found, coverage }: { found: readonly number[]; coverage: Coverage }) {
  const { hits, distinct, richness } = coverage;
  const steps = Array.from({ length: POINTS + 1 }, (_, k) => Math.round((2 * hits * k) / POINTS));
  const curve = [...new Set([...steps, hits])]
    .sort((a, b) => a - b)
    .map((m) => ({ m, s: rarefied(found, m) }));
  const top = Math.max(distinct, richness.estimate, Math.min(richness.high ?? 0, 3 * distinct));
  return (
    <ChartFrame
      ofPopulations={false}
      title="How complete the sampling is"
      fileName="rarefaction"
      note="The share of the search's own hits, not of the population; a lower bound, and everything hangs on the RMSD tolerance. Hits of one search are rarely independent."
      data={{
        columns: [
          { name: "frames", digits: 0 },
          { name: "distinct conformers", digits: 2 },
        ],
        rows: curve.map(({ m, s }) => [m, s]),
      }}
    >
      <Plot
        label="Distinct conformers found against frames"
        height={300}
        x={{ title: "frames", low: -0.01 * hits, high: 2.9 * hits, ticks: undefined }}
        y={{ title: "distinct conformers found", low: 0, high: 1.12 * top }}
        points={curve
          .filter((_, k) => k % 6 === 0)
          .map(({ m, s }) => ({
            x: m,
            y: s,
            label: `${plural(m, "frame")}: ${fixed(s, 1)} conformers${m > hits ? ", expected" : ""}`,
          }))}
      >
        <Layer curve={curve} coverage={coverage} top={top} />
      </Plot>
    </ChartFrame>
  );
}

function Layer({
  curve,
  coverage,
  top,
}: {
  curve: readonly { m: number; s: number }[];
  coverage: Coverage;
  top: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const { hits, distinct, richness } = coverage;
  const path = (list: readonly { m: number; s: number }[]) =>
    list.map(({ m, s }, k) => `${k === 0 ? "M" : "L"}${plot.x(m)} ${plot.y(s)}`).join("");
  const at = plot.x(2 * hits) + 14;
  const high = richness.high === null ? null : Math.min(richness.high, 1.1 * top);
  return (
    <g>
      <path d={`M${plot.x(hits)} ${plot.top}V${plot.bottom}`} stroke="var(--color-rule)" />
      <path
        d={path(curve.filter(({ m }) => m <= hits))}
        fill="none"
        stroke="var(--color-depth-6)"
        strokeWidth={2.2}
      />
      <path
        d={path(curve.filter(({ m }) => m >= hits))}
        fill="none"
        stroke="var(--color-depth-6)"
        strokeWidth={1.75}
        strokeDasharray="6 3"
      />
      <circle
        cx={plot.x(hits)}
        cy={plot.y(distinct)}
        r={4.5}
        fill="var(--color-paper)"
        stroke="var(--color-ink)"
        strokeWidth={1.5}
      />
      <ChartText x={plot.x(hits) - 6} y={plot.y(distinct) - 9} end tone="ink" halo>
        {formatCount(distinct)} in {plural(hits, "frame")}
      </ChartText>
      {high !== null && richness.low !== null && richness.estimate > distinct ? (
        <path
          d={`M${at} ${plot.y(richness.low)}V${plot.y(high)}M${at - 4} ${plot.y(richness.low)}h8${(richness.high ?? 0) > high ? "" : `M${at - 4} ${plot.y(high)}h8`}`}
          stroke="var(--color-ink-3)"
          strokeWidth={1.5}
          fill="none"
        />
      ) : null}
      <path d={`M${at - 6} ${plot.y(richness.estimate)}h12`} stroke="var(--color-ink)" strokeWidth={2} />
      <ChartText x={at + 10} y={plot.y(richness.estimate) + 4} tone="ink" halo>
        at least {formatCount(Math.round(richness.estimate))}
      </ChartText>
      {high !== null && high > richness.estimate * 1.08 ? (
        <ChartText x={at + 10} y={plot.y(high) + 4} halo>
          95 %: {formatCount(Math.round(richness.high ?? high))}
        </ChartText>
      ) : null}
    </g>
  );
}

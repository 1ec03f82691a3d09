import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { fixed, formatCount, formatRmsd, plural, withUnit } from "~/lib/format";
import type { NearnessBin, NearnessHistogram } from "~/lib/workbench/nearness";

/** The highest bar, of exact copies mostly, may dwarf the rest: it is cut where it is so many times the next. */
const CUT = 4;

/** Frames by the RMSD to what they are most like, so that a tolerance can be set into the gap. */
export function NearnessChart({
  histogram,
  tolerance,
}: {
  histogram: NearnessHistogram;
  /** Å, as the slider stands. */
  tolerance: number;
}) {
  const { bins, farthestMerged, nearestApart, closed } = histogram;
  const heights = bins.map((bin) => bin.merged + bin.apart).sort((a, b) => b - a);
  const highest = heights[0] ?? 1;
  const next = heights[1] ?? 0;
  const top = Math.max(3, next > 0 && highest > CUT * next ? 1.6 * next : highest) * 1.12;
  const end = bins.at(-1)?.to ?? 1;
  const gap =
    farthestMerged !== null && nearestApart !== null && nearestApart > farthestMerged
      ? `Nothing lies between ${fixed(farthestMerged, 3)} and ${withUnit(fixed(nearestApart, 3), "Å")}.`
      : "There is no gap between what was merged and what was kept apart.";
  const words = (bin: NearnessBin) =>
    `${fixed(bin.from, 3)} to ${withUnit(fixed(bin.to, 3), "Å")}: ${plural(bin.merged, "repeat")}, ${plural(bin.apart, "conformer")} kept apart`;
  const filled = bins.filter((bin) => bin.merged + bin.apart > 0);
  return (
    <ChartFrame
      ofPopulations={false}
      title="How near the frames lie"
      fileName="nearest-rmsd"
      note={`${gap} Filled: frames that were merged, by the RMSD to the conformer they repeat; outlined: kept conformers, by the RMSD to the nearest other one.${closed ? "" : " The last bar holds everything farther away."}`}
      data={{
        columns: [
          { name: "from", unit: "Å", digits: 3 },
          { name: "to", unit: "Å", digits: 3 },
          { name: "merged", digits: 0 },
          { name: "kept apart", digits: 0 },
        ],
        rows: filled.map((bin) => [bin.from, bin.to, bin.merged, bin.apart]),
      }}
    >
      <Plot
        label="Frames by the RMSD to what they are most like"
        height={260}
        axisWidth={top >= 1000 ? 44 : 36}
        x={{ title: "RMSD to the nearest, Å", low: -0.01 * end, high: end }}
        y={{ title: "frames", low: 0, high: top }}
        points={filled.map((bin) => ({
          x: (bin.from + bin.to) / 2,
          y: Math.min(bin.merged + bin.apart, top),
          label: words(bin),
        }))}
      >
        <Bars bins={bins} top={top} tolerance={tolerance} end={end} />
      </Plot>
    </ChartFrame>
  );
}

function Bars({
  bins,
  top,
  tolerance,
  end,
}: {
  bins: readonly NearnessBin[];
  top: number;
  tolerance: number;
  end: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const at = plot.x(tolerance);
  return (
    <g>
      {bins.map((bin) => {
        const x = plot.x(bin.from) + 0.5;
        const width = Math.max(1, plot.x(bin.to) - plot.x(bin.from) - 1);
        const whole = bin.merged + bin.apart;
        const y = (count: number) => plot.y(Math.min(count, top));
        return whole === 0 ? null : (
          <g key={bin.from}>
            {bin.merged > 0 ? (
              <rect
                x={x}
                y={y(bin.merged)}
                width={width}
                height={plot.bottom - y(bin.merged)}
                fill="var(--color-ink-3)"
              />
            ) : null}
            {bin.apart > 0 && y(whole) < y(bin.merged) ? (
              <rect
                x={x + 0.5}
                y={y(whole)}
                width={Math.max(1, width - 1)}
                height={y(bin.merged) - y(whole)}
                fill="var(--color-sheet)"
                stroke="var(--color-ink-3)"
              />
            ) : null}
            {whole > top ? (
              <ChartText x={x + width + 4} y={plot.top + 10} halo>
                {formatCount(whole)}
              </ChartText>
            ) : null}
          </g>
        );
      })}
      {tolerance <= end ? (
        <>
          <path
            d={`M${at} ${plot.top}V${plot.bottom}`}
            stroke="var(--color-mark)"
            strokeWidth={1.2}
            strokeDasharray="5 4"
          />
          <ChartText
            x={at + (tolerance > 0.7 * end ? -6 : 6)}
            y={plot.top + 26}
            end={tolerance > 0.7 * end}
            tone="mark"
            halo
          >
            {withUnit(formatRmsd(tolerance), "Å")}
          </ChartText>
        </>
      ) : null}
    </g>
  );
}

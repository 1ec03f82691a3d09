import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { formatEnergy, formatWindowToCarry, plural } from "~/lib/format";
import { nextWindow } from "~/lib/levels/window";
import { ZERO_WORDS } from "./comparison-facts";
import { PairLayer } from "./pair-layer";
import { drawnPoints, energyTop, type PairPoint, percent, pointWords } from "./pair-points";
import type { Comparison } from "./use-comparison";

/** Relative energy at one level against the other, with the line of equal energies and the level's error about it. */
export function LevelAgainstLevel({
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
  const { level, reference, comparison, window } = found;
  const top = Math.max(
    energyTop(
      points.map((p) => p.level),
      comparison.window[2]?.kcal ?? 0,
    ),
    energyTop(
      points.map((p) => p.reference),
      0,
    ),
  );
  const inside = points.filter((p) => p.level <= top && p.reference <= top);
  const drawn = drawnPoints(inside);
  // Both axes start at the level's own lowest: there the two lists differ by this much where their energies are equal.
  const first = points[0];
  const offset = first ? first.level - first.reference - first.deviation : 0;
  const left = points.length - drawn.length;
  const lowest = [...drawn].sort((a, b) => a.reference - b.reference).slice(0, 4);
  const farthest = points[comparison.maxPlace];
  return (
    <ChartFrame
      title="Level against level"
      fileName="level-against-level"
      note={[
        `Line: equal energies, ${ZERO_WORDS[comparison.align]} of ${formatEnergy(offset)} taken off.`,
        comparison.sd === null ? null : `Band: ± ${formatEnergy(comparison.sd)}, one standard deviation.`,
        farthest ? `Farthest off: ${farthest.name}, ${formatEnergy(comparison.max)}.` : null,
        left > 0
          ? `${plural(left, "conformer")} outside the figure, or less populated than the ${drawn.length} drawn; all stand in the table.`
          : null,
      ]
        .filter(Boolean)
        .join(" ")}
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: level.name, unit: "kcal/mol", digits: 2 },
          { name: `${reference.name} (reference)`, unit: "kcal/mol", digits: 2 },
          { name: "deviation", unit: "kcal/mol", digits: 2 },
          { name: "population at the reference", unit: "%", digits: 1 },
        ],
        rows: points.map((p) => [
          p.name,
          p.frame,
          p.level,
          p.reference,
          p.deviation,
          percent(p.referencePopulation),
        ]),
      }}
    >
      <Plot
        height={400}
        label={`Relative energies of ${plural(drawn.length, "conformer")} at two levels`}
        x={{ title: `${level.name}, kcal/mol`, low: -0.045 * top, high: top, ordinal: level.ordinal }}
        y={{ title: `${reference.name}, kcal/mol`, low: -0.045 * top, high: top, ordinal: reference.ordinal }}
        points={[...drawn]
          .sort((a, b) => a.level - b.level || a.reference - b.reference)
          .map((p) => ({
            x: p.level,
            y: p.reference,
            frame: p.frame,
            label: pointWords(p, level.name, reference.name),
          }))}
        onChoose={onChoose}
      >
        <LineLayer
          offset={offset}
          band={comparison.sd ?? 0}
          window={window.kcal}
          next={nextWindow(found.steps, window.kcal)}
          top={top}
        />
        <PairLayer
          points={drawn}
          x={(p) => p.level}
          y={(p) => p.reference}
          selected={selected}
          named={[
            ...lowest.map((point) => ({ point, text: point.name })),
            ...(farthest && farthest.level <= top && farthest.reference <= top && points.length > 4
              ? [{ point: farthest, text: farthest.name }]
              : []),
          ]}
        />
      </Plot>
    </ChartFrame>
  );
}

/** Equal energies, a band of one standard deviation, and the window that the reader asked for. */
function LineLayer({
  offset,
  band,
  window,
  next,
  top,
}: {
  offset: number;
  band: number;
  window: number;
  next: number;
  top: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const from = -0.045 * top;
  // Equal energies: level - reference = offset.
  const at = (shift: number) => ({
    x0: Math.max(from, from + offset - shift),
    x1: Math.min(top, top + offset - shift),
    shift,
  });
  const path = ({ x0, x1, shift }: ReturnType<typeof at>) =>
    `M${plot.x(x0).toFixed(1)} ${plot.y(x0 - offset + shift).toFixed(1)}L${plot.x(x1).toFixed(1)} ${plot.y(x1 - offset + shift).toFixed(1)}`;
  const corner = (x: number, y: number) => `${plot.x(x).toFixed(1)} ${plot.y(y).toFixed(1)}`;
  const clip = (x: number, shift: number) => Math.max(from, Math.min(top, x - offset + shift));
  // The band as a polygon whose ends follow the frame of the figure.
  const steps = Array.from({ length: 41 }, (_, k) => from + ((top - from) * k) / 40);
  const upper = steps.map((x) => corner(x, clip(x, band)));
  const lower = steps.map((x) => corner(x, clip(x, -band))).reverse();
  return (
    <g>
      {band > 0 ? (
        <path d={`M${[...upper, ...lower].join("L")}Z`} fill="var(--color-rule)" fillOpacity={0.55} />
      ) : null}
      <path d={path(at(0))} stroke="var(--color-ink-3)" strokeWidth={1.2} fill="none" />
      {window <= top ? (
        <path
          d={`M${plot.x(window)} ${plot.top}V${plot.bottom}`}
          stroke="var(--color-mark)"
          strokeDasharray="5 4"
        />
      ) : null}
      {window <= top ? (
        <ChartText
          x={plot.x(window) + (window > 0.6 * top ? -6 : 6)}
          y={plot.top + 10}
          end={window > 0.6 * top}
          tone="mark"
          halo
        >
          window {formatWindowToCarry(window, next)}
        </ChartText>
      ) : null}
    </g>
  );
}

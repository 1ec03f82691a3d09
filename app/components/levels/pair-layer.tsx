import { ChartText, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { apart, LETTER_PX, type PairPoint } from "./pair-points";

/** Circles tinted by the reference population; chosen ones ringed in magenta, named ones with their name beside them. */
export function PairLayer({
  points,
  x,
  y,
  selected,
  named,
  keepClear = [],
}: {
  points: readonly PairPoint[];
  x: (point: PairPoint) => number;
  y: (point: PairPoint) => number;
  selected: ReadonlySet<number>;
  /** Most important first: where names would lie on each other the first stays. */
  named: readonly { point: PairPoint; text: string }[];
  /** Words that stand at the right edge of the drawing, at a y of the data: no name is written over them. */
  keepClear?: readonly { y: number; text: string }[];
}) {
  const plot = usePlot();
  if (!plot) return null;
  const radius = points.length > 300 ? 3 : 4.5;
  const taken = keepClear.map((words) => ({
    ...{ key: -1, text: words.text, end: false },
    x: plot.right - 4 - LETTER_PX * words.text.length,
    y: plot.y(words.y) - 5,
  }));
  const labels = apart([
    ...taken,
    ...named.map(({ point, text }) => {
      const [left, top] = [plot.x(x(point)), plot.y(y(point)) - 6];
      const end = left > plot.right - LETTER_PX * text.length - 12;
      return { key: point.frame, text, end, x: end ? left - 8 - LETTER_PX * text.length : left + 8, y: top };
    }),
  ]).slice(taken.length);
  return (
    <g>
      {points.map((point) => (
        <circle
          key={point.frame}
          cx={plot.x(x(point))}
          cy={plot.y(y(point))}
          r={radius}
          fill={depthColour(point.referencePopulation)}
          stroke={selected.has(point.frame) ? "var(--color-mark)" : "var(--color-ink)"}
          strokeWidth={selected.has(point.frame) ? 2.5 : 1}
        />
      ))}
      {labels.map(({ key, text, end, x: left, y: top }) => (
        <ChartText
          key={key}
          x={end ? left + LETTER_PX * text.length : left}
          y={top}
          end={end}
          tone="ink"
          halo
        >
          {text}
        </ChartText>
      ))}
    </g>
  );
}

import { ChartText, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { apart, type PairPoint } from "./pair-points";

/** Circles tinted by the reference population; chosen ones ringed in magenta, named ones with their name beside them. */
export function PairLayer({
  points,
  x,
  y,
  selected,
  named,
}: {
  points: readonly PairPoint[];
  x: (point: PairPoint) => number;
  y: (point: PairPoint) => number;
  selected: ReadonlySet<number>;
  /** Most important first: where names would lie on each other the first stays. */
  named: readonly { point: PairPoint; text: string }[];
}) {
  const plot = usePlot();
  if (!plot) return null;
  const radius = points.length > 300 ? 3 : 4.5;
  const labels = apart(
    named.map(({ point, text }) => ({ key: point.frame, text, x: plot.x(x(point)), y: plot.y(y(point)) })),
  );
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
      {labels.map(({ key, text, x: left, y: top }) => {
        const end = left > plot.right - 7 * text.length - 12;
        return (
          <ChartText key={key} x={end ? left - 8 : left + 8} y={top - 6} end={end} tone="ink" halo>
            {text}
          </ChartText>
        );
      })}
    </g>
  );
}

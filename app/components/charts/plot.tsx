import {
  type KeyboardEvent,
  type PointerEvent,
  type ReactNode,
  useEffect,
  useId,
  useRef,
  useState,
} from "react";
import {
  ComposedChart,
  ResponsiveContainer,
  usePlotArea,
  useXAxisScale,
  useYAxisScale,
  XAxis,
  YAxis,
} from "recharts";
import { LevelGlyph } from "~/components/ui/level-marker";
import { fixed } from "~/lib/format";
import { roundTicks, tickDigits } from "~/lib/workbench/ticks";

export interface Axis {
  /** "quantity, unit" */
  title: string;
  low: number;
  high: number;
  /** Round values; found by itself where left out. */
  ticks?: readonly number[];
  /** How a tick is written, where not as a number with the decimals that all need. */
  tickText?: (value: number) => string;
  /** Level of theory whose marker stands before the title. */
  ordinal?: number;
}

/** A place in the chart that takes focus and says its value. */
export interface PlotPoint {
  x: number;
  y: number;
  /** What the line below reads: "c1, frame 11: 0.00 kcal/mol, 28.5 %". */
  label: string;
  /** Chosen by Enter or click; absent where a point stands for nothing to select. */
  frame?: number;
}

const MARGIN = { top: 28, right: 12, bottom: 0, left: 0 };
const FOOT = 44;
/** Pointer farther from every point than this reads nothing. */
const REACH = 28;
/** A point of 4.5 px, the gap of 2 px, and half the ring of 2 px. */
const FOCUS_RADIUS = 7.5;

/**
 * Frame of every chart: axes with round values, titles level with them, points that can be walked by key and read off
 * below. What is drawn inside are layers that take their scales from `usePlot`.
 */
export function Plot({
  x,
  y,
  height = 320,
  axisWidth = 36,
  label,
  points,
  onChoose,
  children,
}: {
  x: Axis;
  y: Axis;
  height?: number;
  axisWidth?: number;
  /** Name of the figure for those who do not see it. */
  label: string;
  points: readonly PlotPoint[];
  onChoose?: Choose;
  children: ReactNode;
}) {
  const [active, setActive] = useState<number | null>(null);
  const [walking, setWalking] = useState(false);
  const shown = active === null ? undefined : points[active];
  const id = useId();
  const xTicks = x.ticks ?? roundTicks(x.low, x.high, 6);
  const yTicks = y.ticks ?? roundTicks(y.low, y.high, 6);

  const onKeyDown = (event: KeyboardEvent) => {
    const last = points.length - 1;
    if (last < 0) return;
    const now = active ?? 0;
    const next = {
      ArrowRight: Math.min(last, now + 1),
      ArrowDown: Math.min(last, now + 1),
      ArrowLeft: Math.max(0, now - 1),
      ArrowUp: Math.max(0, now - 1),
      Home: 0,
      End: last,
    }[event.key];
    if (next !== undefined) {
      event.preventDefault();
      setWalking(true);
      setActive(next);
    } else if ((event.key === "Enter" || event.key === " ") && shown?.frame !== undefined && onChoose) {
      event.preventDefault();
      onChoose(shown.frame, event);
    } else if (event.key === "Escape") setActive(null);
  };

  return (
    <div>
      {/* biome-ignore lint/a11y/noStaticElementInteractions: keys arrive from the focusable point inside */}
      <div className="relative" onKeyDown={onKeyDown} onBlur={() => setWalking(false)}>
        <ResponsiveContainer
          width="100%"
          height={height}
          initialDimension={{ width: 438, height }}
          // Never wider than its place, not even before the place is known, nor on paper.
          className="@container [&_.recharts-wrapper]:max-w-[100cqw] [&_svg]:overflow-visible"
        >
          <ComposedChart
            margin={{ ...MARGIN, bottom: FOOT - 30 }}
            data={BOUNDS}
            accessibilityLayer={false}
            role="group"
            aria-label={label}
            tabIndex={-1}
          >
            <XAxis
              type="number"
              dataKey="x"
              domain={[x.low, x.high]}
              ticks={[...xTicks]}
              interval={0}
              allowDataOverflow
              tickSize={4}
              tickMargin={6}
              height={30}
              axisLine={AXIS_LINE}
              tickLine={AXIS_LINE}
              tick={TICK}
              tickFormatter={x.tickText ?? ((value: number) => fixed(value, tickDigits(xTicks)))}
            />
            <YAxis
              type="number"
              domain={[y.low, y.high]}
              ticks={[...yTicks]}
              interval={0}
              allowDataOverflow
              tickSize={4}
              tickMargin={6}
              width={axisWidth}
              axisLine={AXIS_LINE}
              tickLine={AXIS_LINE}
              tick={TICK}
              tickFormatter={y.tickText ?? ((value: number) => fixed(value, tickDigits(yTicks)))}
            />
            <AxisTitles x={x} y={y} height={height} />
            {children}
            <PointLayer
              points={points}
              active={active}
              walking={walking}
              onActive={setActive}
              onChoose={onChoose}
              describedBy={`${id}-hint`}
            />
          </ComposedChart>
        </ResponsiveContainer>
      </div>
      <p className="figures min-h-4 truncate text-xs text-ink-2" aria-hidden="true">
        {shown?.label}
      </p>
      <span id={`${id}-hint`} className="sr-only">
        Arrow keys walk the points{onChoose ? ", Enter selects" : ""}.
      </span>
    </div>
  );
}

const AXIS_LINE = { stroke: "var(--color-rule-2)", strokeWidth: 1 };
const TICK = { fontSize: 12, fill: "var(--color-ink-3)" };
/** Recharts makes scales only where there is something to draw; the domains above rule. */
const BOUNDS = [{ x: 0 }];

/** Called with the frame of a chosen point and the keys held. */
export type Choose = (frame: number, keys: { shiftKey: boolean; ctrlKey: boolean; metaKey: boolean }) => void;

export interface PlotScales {
  x: (value: number) => number;
  y: (value: number) => number;
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** Scales of the plot around a layer, in pixels; null before the first measure. */
export function usePlot(): PlotScales | null {
  const xScale = useXAxisScale();
  const yScale = useYAxisScale();
  const area = usePlotArea();
  if (!xScale || !yScale || !area) return null;
  return {
    x: (value) => xScale(value) ?? Number.NaN,
    y: (value) => yScale(value) ?? Number.NaN,
    left: area.x,
    right: area.x + area.width,
    top: area.y,
    bottom: area.y + area.height,
  };
}

/** Small text in a chart. `tone` mark is what the reader set. */
export function ChartText({
  x,
  y,
  end,
  middle,
  tone = "plain",
  halo,
  children,
}: {
  x: number;
  y: number;
  end?: boolean;
  middle?: boolean;
  tone?: "plain" | "ink" | "mark";
  /** A rim of the ground, where lines run beneath. */
  halo?: boolean;
  children: ReactNode;
}) {
  const fill =
    tone === "mark" ? "var(--color-mark)" : tone === "ink" ? "var(--color-ink)" : "var(--color-ink-3)";
  return (
    <text
      x={x}
      y={y}
      fontSize={12}
      fontWeight={tone === "plain" ? 400 : 500}
      fill={fill}
      textAnchor={end ? "end" : middle ? "middle" : "start"}
      {...(halo
        ? { stroke: "var(--color-paper)", strokeWidth: 4, strokeLinejoin: "round", paintOrder: "stroke" }
        : {})}
    >
      {children}
    </text>
  );
}

/** About how wide a text of 12 px is: how far left of a title that ends at the right its marker stands. */
function textWidth(text: string): number {
  let width = 0;
  for (const letter of text)
    width += /[ .,:;'()|/ijltfr]/.test(letter) ? 4.2 : /[A-Z0-9%mw]/.test(letter) ? 7.9 : 6.6;
  return width;
}

function AxisTitles({ x, y, height }: { x: Axis; y: Axis; height: number }) {
  const plot = usePlot();
  if (!plot) return null;
  return (
    <>
      {y.ordinal ? <LevelGlyph ordinal={y.ordinal} x={0} y={2} /> : null}
      <ChartText x={y.ordinal ? 18 : 0} y={12}>
        {y.title}
      </ChartText>
      {x.ordinal ? (
        <LevelGlyph
          ordinal={x.ordinal}
          x={Math.max(0, plot.right - textWidth(x.title) - 18)}
          y={height - 12}
        />
      ) : null}
      <ChartText x={plot.right} y={height - 2} end>
        {x.title}
      </ChartText>
    </>
  );
}

function PointLayer({
  points,
  active,
  walking,
  onActive,
  onChoose,
  describedBy,
}: {
  points: readonly PlotPoint[];
  active: number | null;
  walking: boolean;
  onActive: (index: number | null) => void;
  onChoose?: Choose;
  describedBy: string;
}) {
  const plot = usePlot();
  const target = useRef<SVGGElement>(null);
  // biome-ignore lint/correctness/useExhaustiveDependencies: a new active point is a new element that must take the focus
  useEffect(() => {
    if (walking) target.current?.focus();
  }, [walking, active]);
  if (!plot || points.length === 0) return null;
  const nearest = (event: PointerEvent<SVGRectElement>) => {
    const box = event.currentTarget.getBoundingClientRect();
    const px = event.clientX - box.left + plot.left;
    const py = event.clientY - box.top + plot.top;
    let best: number | null = null;
    let least = REACH;
    for (const [index, point] of points.entries()) {
      const d = Math.hypot(plot.x(point.x) - px, plot.y(point.y) - py);
      if (d < least) {
        least = d;
        best = index;
      }
    }
    return best;
  };
  const index = active ?? 0;
  const point = points[index];
  if (!point) return null;
  return (
    <g data-screen-only="true">
      {/* biome-ignore lint/a11y/noStaticElementInteractions: every point is reached by key through the ring below */}
      <rect
        x={plot.left}
        y={plot.top}
        width={Math.max(0, plot.right - plot.left)}
        height={Math.max(0, plot.bottom - plot.top)}
        fill="transparent"
        className={onChoose && active !== null && point.frame !== undefined ? "cursor-pointer" : undefined}
        onPointerMove={(event) => onActive(nearest(event))}
        onPointerLeave={() => onActive(null)}
        onClick={(event) => {
          if (active !== null && point.frame !== undefined) onChoose?.(point.frame, event);
        }}
      />
      {/* biome-ignore lint/a11y/noStaticElementInteractions: the role depends on whether there is something to select */}
      <g
        key={index}
        ref={target}
        tabIndex={0}
        role={onChoose && point.frame !== undefined ? "button" : "img"}
        aria-label={point.label}
        aria-describedby={describedBy}
        className="group outline-none"
        onFocus={() => onActive(index)}
        onBlur={() => onActive(null)}
      >
        {/* The ring of the focus: 2 px, 2 px off the point, on a rim of the ground so that it stands out of a crowd. */}
        {[
          { colour: "var(--color-paper)", width: 6 },
          { colour: "var(--color-mark)", width: 2 },
        ].map(({ colour, width }) => (
          <circle
            key={width}
            cx={plot.x(point.x)}
            cy={plot.y(point.y)}
            r={FOCUS_RADIUS}
            fill="none"
            stroke={colour}
            strokeWidth={width}
            className="pointer-events-none opacity-0 group-focus-visible:opacity-100"
          />
        ))}
        <circle
          cx={plot.x(point.x)}
          cy={plot.y(point.y)}
          r={6}
          fill="none"
          stroke="var(--color-mark)"
          strokeWidth={2}
          className={`pointer-events-none group-focus-visible:opacity-0 ${active === null ? "opacity-0" : ""}`}
        />
      </g>
    </g>
  );
}

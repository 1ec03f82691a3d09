import type { ReactNode } from "react";
import { depthColour } from "~/components/ui/depth-strip";
import { fixed, formatPercent, formatWindowToCarry, plural, withUnit } from "~/lib/format";
import type { ConformerRow } from "~/lib/workbench/conformers";
import type { Cumulative } from "~/lib/workbench/cumulative";
import type { Ladder } from "~/lib/workbench/ladder";
import { roundTicks, tickDigits } from "~/lib/workbench/ticks";

const WIDTH = 340;
const HEIGHT = 260;
const LEFT = 36;
const BOTTOM = 220;
const TOP = 24;

/** The two figures of an edition on paper and without script: the same numbers, drawn once at one width. */
export function StillPlots({
  rows,
  ladder,
  cumulative,
}: {
  rows: readonly ConformerRow[];
  ladder: Ladder | null;
  cumulative: Cumulative | null;
}) {
  if (!ladder || !cumulative || rows.length === 0) return null;
  const energy = { low: -0.035 * ladder.top, high: ladder.top };
  const widest = 112 * ladder.widest;
  const nextEnergy = (window: number) => cumulative.steps.find((step) => step.energy > window)?.energy;
  return (
    <div className="grid gap-x-10 gap-y-4 lg:grid-cols-2 print:grid-cols-2">
      <StillPlot
        title="Energy ladder"
        x={{ title: "population, %", low: 0, high: widest }}
        y={{ title: "relative energy, kcal/mol", ...energy }}
      >
        {(x, y) => [
          <path key="curve" d={curvePath(ladder, widest, x, y)} className="fill-none stroke-ink-3" />,
          ...named(ladder, y).map(({ rung, name }) => (
            <g key={rung.index}>
              <rect
                x={LEFT}
                y={y(rung.energy) - 3}
                width={Math.max(1, x(100 * rung.population) - LEFT)}
                height={6}
                fill={depthColour(rung.population)}
              />
              <rect
                x={x(100 * rung.population) - 1.5}
                y={y(rung.energy) - 3}
                width={1.5}
                height={6}
                className="fill-ink"
              />
              {name === null ? null : (
                <text x={x(100 * rung.population) + 4} y={y(rung.energy) + 4} className="fill-ink-2">
                  {name}
                </text>
              )}
            </g>
          )),
        ]}
      </StillPlot>
      <StillPlot
        title="Cumulative population"
        x={{ title: "window, kcal/mol", low: 0, high: ladder.top }}
        y={{ title: "population within, %", low: 0, high: 102 }}
      >
        {(x, y) => (
          <path
            d={stepPath(cumulative, ladder.top, x, y)}
            className="fill-none stroke-depth-6"
            strokeWidth={1.75}
          />
        )}
      </StillPlot>
      <p className="figures text-ink-2 lg:col-span-2 print:col-span-2">
        {cumulative.readings
          .map(
            ({ asked, energy: window, count }) =>
              `${formatPercent(asked)} lies within ${formatWindowToCarry(window, nextEnergy(window))} kcal/mol (${plural(count, "conformer")})`,
          )
          .join("; ")}
        .{" "}
        {ladder.above.count > 0
          ? `${plural(ladder.above.count, "conformer")} above ${withUnit(fixed(ladder.top, 2), "kcal/mol")} not drawn, ${formatPercent(ladder.above.share, 1)}.`
          : ""}
      </p>
    </div>
  );
}

/** Rungs with their names where those stand clear of each other; the more populated keep theirs. */
function named(ladder: Ladder, y: Scale) {
  const taken: number[] = [];
  const named = new Set<number>();
  for (const { index, energy } of [...ladder.rungs].sort((a, b) => b.population - a.population)) {
    if (taken.some((height) => Math.abs(height - y(energy)) < 12)) continue;
    taken.push(y(energy));
    named.add(index);
  }
  return ladder.rungs.map((rung) => ({ rung, name: named.has(rung.index) ? rung.name : null }));
}

type Scale = (value: number) => number;

/** The Boltzmann curve, as far as the axis of populations goes. */
function curvePath(ladder: Ladder, widest: number, x: Scale, y: Scale): string {
  const points = ladder.curve.points.filter(({ population }) => 100 * population <= widest);
  return points
    .map(({ energy, population }, k) =>
      [k === 0 ? "M" : "L", x(100 * population).toFixed(1), " ", y(energy).toFixed(1)].join(""),
    )
    .join("");
}

function stepPath(cumulative: Cumulative, top: number, x: Scale, y: Scale): string {
  let path = `M${LEFT} ${BOTTOM}`;
  for (const { energy, share } of cumulative.steps) {
    if (energy > top) break;
    path += `H${x(energy).toFixed(1)}V${y(100 * share).toFixed(1)}`;
  }
  return `${path}H${WIDTH}`;
}

interface StillAxis {
  title: string;
  low: number;
  high: number;
}

function StillPlot({
  title,
  x,
  y,
  children,
}: {
  title: string;
  x: StillAxis;
  y: StillAxis;
  children: (x: Scale, y: Scale) => ReactNode;
}) {
  const toX = (value: number) => LEFT + ((value - x.low) / (x.high - x.low)) * (WIDTH - LEFT - 4);
  const toY = (value: number) => BOTTOM - ((value - y.low) / (y.high - y.low)) * (BOTTOM - TOP);
  const [xTicks, yTicks] = [roundTicks(x.low, x.high, 5), roundTicks(y.low, y.high, 5)];
  return (
    <figure>
      <figcaption className="mb-2 text-sm font-semibold">{title}</figcaption>
      <svg
        width={WIDTH}
        height={HEIGHT}
        viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
        role="img"
        aria-label={title}
        className="max-w-full text-xs"
      >
        <path d={`M${LEFT} ${TOP}V${BOTTOM}H${WIDTH}`} className="fill-none stroke-rule-2" />
        {children(toX, toY)}
        <g className="fill-ink-3">
          <text x={0} y={12}>
            {y.title}
          </text>
          <text x={WIDTH} y={HEIGHT - 4} textAnchor="end">
            {x.title}
          </text>
          {xTicks.map((tick) => (
            <text key={tick} x={toX(tick)} y={BOTTOM + 16} textAnchor="middle">
              {fixed(tick, tickDigits(xTicks))}
            </text>
          ))}
          {yTicks.map((tick) => (
            <text key={tick} x={LEFT - 6} y={toY(tick) + 4} textAnchor="end">
              {fixed(tick, tickDigits(yTicks))}
            </text>
          ))}
        </g>
      </svg>
    </figure>
  );
}

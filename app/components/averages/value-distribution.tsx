import type { ReactNode } from "react";
import { ChartText, type Choose, usePlot } from "~/components/charts/plot";
import { PopulationDistribution } from "~/components/charts/population-distribution";
import { averageOf, momentsOf } from "~/lib/averages/average";
import { type AverageRule, possibleRules, RULE_WORDS } from "~/lib/averages/rule";
import { steadyWords } from "~/lib/averages/steady";
import { valueHistogram } from "~/lib/averages/value-histogram";
import { digitsFor } from "~/lib/averages/words";
import { fixed } from "~/lib/format";
import { conformerName } from "~/lib/workbench/conformers";
import type { AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

const DEGREE_TICKS = [-180, -120, -60, 0, 60, 120, 180];

/** Where the shapes lie: population against the quantity, with the average, its range, and what another rule would give. */
export function ValueDistribution({
  averaged,
  weighed,
  populations,
  onChoose,
}: {
  averaged: AveragedProperty;
  weighed: WeighedConformers;
  populations: Float64Array;
  onChoose: Choose;
}) {
  const { property, moments, average, error } = averaged;
  const histogram = valueHistogram(moments, populations);
  if (histogram === null) return null;
  const unit = property.unit ?? "";
  const digits = digitsFor(property.unit, average.value);
  const other = otherRule(averaged, weighed, populations);
  const range: [number, number] | null =
    error && error.low !== null && error.high !== null && average.value !== null
      ? [error.low, error.high]
      : null;
  return (
    <PopulationDistribution
      title="Where the shapes lie"
      fileName="value-distribution"
      note={
        [
          steadyWords(moments, unit, digits),
          moments.mirrored.some((flag) => flag === 1)
            ? "A conformer that stands for a mirror pair counts half at each sign."
            : null,
        ]
          .filter(Boolean)
          .join(" ") || undefined
      }
      label={`Distribution of ${property.name} by population`}
      height={282}
      bins={histogram.bins}
      unit={unit}
      digits={digits}
      axis={unit === "" ? property.name : `${property.name}, ${unit}`}
      per={`${fixed(histogram.width, digitsOf(histogram.width))} ${unit}`.trim()}
      ticks={moments.rule === "circular" && moments.turn === 360 ? DEGREE_TICKS : undefined}
      headroom={1.28}
      partOf={(index) => ({
        name: conformerName(weighed.places[index] ?? 0),
        frame: weighed.kept[index]?.frame,
        population: populations[index] ?? 0,
      })}
      behind={range === null ? null : <Range from={range[0]} to={range[1]} />}
      onChoose={onChoose}
    >
      {other !== null && other.value >= (histogram.bins[0]?.from ?? 0) ? (
        <Mark value={other.value} top={16} dashed>
          {`${RULE_WORDS[other.rule].name} would be ${fixed(other.value, digits)}`}
        </Mark>
      ) : null}
      {average.value === null ? null : (
        <Mark value={average.value} top={0}>
          <RuleLetters rule={moments.rule} /> {fixed(average.value, digits)}
        </Mark>
      )}
    </PopulationDistribution>
  );
}

/** The rule in a drawing, its power raised. */
function RuleLetters({ rule }: { rule: AverageRule }) {
  if (rule !== "r-6" && rule !== "r-3") return <>{RULE_WORDS[rule].name}</>;
  return (
    <>
      r
      <tspan dy={-4} fontSize={9}>
        −{rule.slice(2)}
      </tspan>
      <tspan dy={4}> average</tspan>
    </>
  );
}

function digitsOf(width: number): number {
  return Math.max(0, (String(Number(width.toPrecision(3))).split(".")[1] ?? "").length);
}

/** What another rule that could be meant would give; null where it is the same or there is none. */
function otherRule(
  { property, moments, average }: AveragedProperty,
  weighed: WeighedConformers,
  populations: Float64Array,
): { rule: AverageRule; value: number } | null {
  if (moments.rule === "circular" || moments.rule === "odd" || average.value === null) return null;
  const rule = possibleRules(property).find((one) => one !== moments.rule && one !== "odd" && one !== "r-3");
  if (rule === undefined) return null;
  const facts = { degeneracies: weighed.kept.map((one) => one.degeneracy), mirrorMerged: false };
  const { value } = averageOf(
    momentsOf({ rule, unit: property.unit, values: property.values }, facts),
    populations,
  );
  return value === null || Math.abs(value - average.value) < 1e-6 * Math.abs(average.value)
    ? null
    : { rule, value };
}

/** 95 % range of the average. */
function Range({ from, to }: { from: number; to: number }) {
  const plot = usePlot();
  if (!plot) return null;
  const clamp = (value: number) => Math.min(plot.right, Math.max(plot.left, plot.x(value)));
  return (
    <rect
      x={clamp(from)}
      y={plot.top}
      width={Math.max(0, clamp(to) - clamp(from))}
      height={plot.bottom - plot.top}
      fill="var(--color-sunk)"
    />
  );
}

/**
 * A line at a value with its words beside it, on the side where there is more room.
 *
 * @param props.top px below the top of the drawing
 */
function Mark({
  value,
  top,
  dashed = false,
  children,
}: {
  value: number;
  top: number;
  dashed?: boolean;
  children: ReactNode;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const x = Math.min(plot.right, Math.max(plot.left, plot.x(value)));
  const left = plot.x(value) > (plot.left + plot.right) / 2;
  return (
    <g>
      <path
        d={`M${x} ${plot.top + top}V${plot.bottom}`}
        stroke={dashed ? "var(--color-ink-3)" : "var(--color-ink)"}
        strokeWidth={dashed ? 1.2 : 1.75}
        strokeDasharray={dashed ? "4 3" : undefined}
      />
      <ChartText
        x={x + (left ? -6 : 6)}
        y={plot.top + top + 8}
        end={left}
        tone={dashed ? undefined : "ink"}
        halo
      >
        {children}
      </ChartText>
    </g>
  );
}

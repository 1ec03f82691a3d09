import type { ReactNode } from "react";
import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "~/components/charts/plot";
import { depthColour } from "~/components/ui/depth-strip";
import { averageOf, momentsOf } from "~/lib/averages/average";
import { type AverageRule, possibleRules, RULE_WORDS } from "~/lib/averages/rule";
import { type ValueHistogram, valueHistogram } from "~/lib/averages/value-histogram";
import { digitsFor } from "~/lib/averages/words";
import { fixed, formatPercent } from "~/lib/format";
import { conformerName } from "~/lib/workbench/conformers";
import { joinWords } from "~/lib/workbench/findings";
import type { AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** Parts thinner than this many pixels are drawn together, in the palest tint. */
const THINNEST = 0.8;
const NAMED = 3;

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
  const circular = moments.rule === "circular";
  const digits = digitsFor(property.unit, average.value);
  const first = histogram.bins[0];
  const last = histogram.bins.at(-1);
  if (!first || !last) return null;
  const span = last.to - first.from;
  const highest = histogram.bins.reduce((most, bin) => Math.max(most, bin.share), 0);
  const name = (index: number) => conformerName(weighed.places[index] ?? 0);
  const filled = histogram.bins.filter((bin) => bin.share > 0);
  const other = otherRule(averaged, weighed, populations);
  const title = unit === "" ? property.name : `${property.name}, ${unit}`;
  return (
    <ChartFrame
      title="Where the shapes lie"
      fileName="value-distribution"
      note={
        moments.mirrored.some((flag) => flag === 1)
          ? "A conformer that stands for a mirror pair counts half at each sign."
          : undefined
      }
      data={{
        columns: [
          { name: "from", unit: unit || undefined, digits },
          { name: "to", unit: unit || undefined, digits },
          { name: "population", unit: "%", digits: 1 },
          { name: "most populated there" },
        ],
        rows: filled.map((bin) => [
          bin.from,
          bin.to,
          100 * bin.share,
          joinWords(bin.parts.slice(0, NAMED).map((part) => name(part.index))),
        ]),
      }}
    >
      <Plot
        label={`Distribution of ${property.name} by population`}
        height={282}
        x={{
          title,
          low: first.from - 0.01 * span,
          high: last.to + 0.01 * span,
          ...(circular ? { ticks: [-180, -120, -60, 0, 60, 120, 180] } : {}),
        }}
        y={{
          title: `population, % per ${fixed(histogram.width, digitsOf(histogram.width))} ${unit}`,
          low: 0,
          high: 128 * highest,
        }}
        points={filled.map((bin) => ({
          x: (bin.from + bin.to) / 2,
          y: 100 * bin.share,
          frame: weighed.kept[bin.parts[0]?.index ?? -1]?.frame,
          label: `${fixed(bin.from, digits)} to ${fixed(bin.to, digits)} ${unit}: ${formatPercent(bin.share, 1)}, first ${name(bin.parts[0]?.index ?? 0)}`,
        }))}
        onChoose={onChoose}
      >
        <Layer
          histogram={histogram}
          populations={populations}
          name={name}
          average={average.value}
          averageWords={
            <>
              <RuleLetters rule={moments.rule} /> {fixed(average.value, digits)}
            </>
          }
          range={
            error && error.low !== null && error.high !== null && average.value !== null
              ? [error.low, error.high]
              : null
          }
          other={
            other === null
              ? null
              : {
                  value: other.value,
                  words: `${RULE_WORDS[other.rule].name} would be ${fixed(other.value, digits)}`,
                }
          }
        />
      </Plot>
    </ChartFrame>
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
  return Math.max(0, (String(Number(width.toPrecision(6))).split(".")[1] ?? "").length);
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
  const { value } = averageOf(momentsOf({ rule, values: property.values }, facts), populations);
  return value === null || Math.abs(value - average.value) < 1e-6 * Math.abs(average.value)
    ? null
    : { rule, value };
}

function Layer({
  histogram,
  populations,
  name,
  average,
  averageWords,
  range,
  other,
}: {
  histogram: ValueHistogram;
  populations: Float64Array;
  name: (index: number) => string;
  average: number | null;
  averageWords: ReactNode;
  range: [number, number] | null;
  other: { value: number; words: string } | null;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const clamp = (value: number) => Math.min(plot.right, Math.max(plot.left, plot.x(value)));
  const tallest = [...histogram.bins].sort((a, b) => b.share - a.share).slice(0, NAMED);
  const endOfAverage = average !== null && plot.x(average) > (plot.left + plot.right) / 2;
  return (
    <g>
      {range ? (
        <rect
          x={clamp(range[0])}
          y={plot.top}
          width={Math.max(0, clamp(range[1]) - clamp(range[0]))}
          height={plot.bottom - plot.top}
          fill="var(--color-sunk)"
        />
      ) : null}
      {histogram.bins.map((bin) => (
        <Bar key={bin.from} bin={bin} populations={populations} />
      ))}
      {other && other.value >= (histogram.bins[0]?.from ?? 0) ? (
        <g>
          <path
            d={`M${clamp(other.value)} ${plot.top + 16}V${plot.bottom}`}
            stroke="var(--color-ink-3)"
            strokeWidth={1.2}
            strokeDasharray="4 3"
          />
          <ChartText
            x={clamp(other.value) + (other.value > (average ?? 0) ? 5 : -5)}
            y={plot.top + 24}
            end={other.value <= (average ?? 0)}
            halo
          >
            {other.words}
          </ChartText>
        </g>
      ) : null}
      {average === null ? null : (
        <g>
          <path
            d={`M${clamp(average)} ${plot.top}V${plot.bottom}`}
            stroke="var(--color-ink)"
            strokeWidth={1.75}
          />
          <ChartText
            x={clamp(average) + (endOfAverage ? -6 : 6)}
            y={plot.top + 8}
            end={endOfAverage}
            tone="ink"
            halo
          >
            {averageWords}
          </ChartText>
        </g>
      )}
      {tallest.map((bin) =>
        bin.share > 0.02 && bin.parts[0] ? (
          <ChartText
            key={bin.from}
            x={(plot.x(bin.from) + plot.x(bin.to)) / 2}
            y={plot.y(100 * bin.share) - 6}
            middle
            tone="ink"
            halo
          >
            {name(bin.parts[0].index)}
          </ChartText>
        ) : null,
      )}
    </g>
  );
}

function Bar({ bin, populations }: { bin: ValueHistogram["bins"][number]; populations: Float64Array }) {
  const plot = usePlot();
  if (!plot || bin.share === 0) return null;
  const x = plot.x(bin.from) + 0.4;
  const width = Math.max(0.5, plot.x(bin.to) - plot.x(bin.from) - 0.8);
  const base = plot.y(0);
  const perShare = base - plot.y(100);
  const blocks: { y: number; height: number; population: number }[] = [];
  let below = 0;
  for (const part of bin.parts) {
    const height = part.share * perShare;
    if (height < THINNEST) break;
    blocks.push({
      y: base - (below + part.share) * perShare,
      height: Math.max(0.3, height - 0.8),
      population: populations[part.index] ?? 0,
    });
    below += part.share;
  }
  const rest = (bin.share - below) * perShare;
  return (
    <g>
      {blocks.map((block) => (
        <rect
          key={block.y}
          x={x}
          y={block.y}
          width={width}
          height={block.height}
          fill={depthColour(block.population)}
        />
      ))}
      {rest > 0.2 ? (
        <rect x={x} y={base - bin.share * perShare} width={width} height={rest} fill="var(--color-depth-1)" />
      ) : null}
      <path d={`M${x} ${base - bin.share * perShare}h${width}`} stroke="var(--color-ink)" strokeWidth={1.5} />
    </g>
  );
}

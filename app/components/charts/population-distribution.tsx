import type { ReactNode } from "react";
import { depthColour } from "~/components/ui/depth-strip";
import { fixed, formatPercent, plural } from "~/lib/format";
import { joinWords } from "~/lib/workbench/findings";
import { ChartFrame } from "./chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "./plot";

/** Parts thinner than this many pixels are drawn together, in the palest tint. */
const THINNEST = 0.8;
const NAMED = 3;
/** Bars whose conformer is named: the peaks, tallest first, as far as names have room. */
const NAMED_PEAKS = 8;
const NAME_WIDTH_PX = 30;
/** Share below which a bar is too low for a name. */
const LEAST_NAMED = 0.02;

/** One bar: a population and the conformers that make it, the most populated first. */
export interface PopulationBin {
  from: number;
  to: number;
  share: number;
  parts: readonly { index: number; share: number }[];
}

/** What stands for the index of a part. */
export interface PartOf {
  name: string;
  frame: number | undefined;
  population: number;
}

/** How a quantity spreads over the ensemble, by population: bars stacked from conformers, each in its own tint. */
export function PopulationDistribution({
  title,
  fileName,
  note,
  label,
  height,
  bins,
  unit,
  digits,
  axis,
  per,
  ticks,
  headroom,
  partOf,
  behind,
  children,
  onChoose,
}: {
  title: string;
  fileName: string;
  note?: string;
  /** Of the drawing, for those who do not see it. */
  label: string;
  height: number;
  bins: readonly PopulationBin[];
  /** Empty where the quantity has none. */
  unit: string;
  /** Decimals of the quantity. */
  digits: number;
  /** Title of the horizontal axis. */
  axis: string;
  /** "15°": the width of a bar in words. */
  per: string;
  ticks?: readonly number[];
  /** Highest of the axis over the tallest bar. */
  headroom: number;
  partOf: (index: number) => PartOf;
  /** Drawn below the bars. */
  behind?: ReactNode;
  /** Drawn over the bars, below the names. */
  children?: ReactNode;
  onChoose: Choose;
}) {
  const [first] = bins;
  const last = bins.at(-1);
  if (!first || !last) return null;
  const span = last.to - first.from;
  const highest = bins.reduce((most, bin) => Math.max(most, bin.share), 0);
  const filled = bins.filter((bin) => bin.share > 0);
  const words = ({ parts }: PopulationBin) =>
    joinWords(parts.slice(0, NAMED).map(({ index }) => partOf(index).name));
  return (
    <ChartFrame
      title={title}
      fileName={fileName}
      note={note}
      data={{
        columns: [
          { name: "from", unit: unit || undefined, digits },
          { name: "to", unit: unit || undefined, digits },
          { name: "population", unit: "%", digits: 1 },
          { name: "most populated there" },
        ],
        rows: filled.map((bin) => [bin.from, bin.to, 100 * bin.share, words(bin)]),
      }}
    >
      <Plot
        label={label}
        height={height}
        x={{
          title: axis,
          low: first.from - 0.01 * span,
          high: last.to + 0.01 * span,
          ...(ticks ? { ticks: ticks.filter((tick) => tick >= first.from && tick <= last.to) } : {}),
        }}
        y={{ title: `population, % per ${per}`, low: 0, high: 100 * headroom * highest }}
        points={filled.map((bin) => ({
          x: (bin.from + bin.to) / 2,
          y: 100 * bin.share,
          frame: partOf(bin.parts[0]?.index ?? -1).frame,
          label: `${fixed(bin.from, digits)} to ${fixed(bin.to, digits)}${unit === "°" ? "°" : ` ${unit}`}: ${formatPercent(bin.share, 1)}, ${plural(bin.parts.length, "conformer")}, first ${words(bin)}`,
        }))}
        onChoose={onChoose}
      >
        <g>
          {behind}
          <Bars bins={bins} partOf={partOf} />
          {children}
          <PeakNames bins={bins} partOf={partOf} />
        </g>
      </Plot>
    </ChartFrame>
  );
}

type Drawn = { bins: readonly PopulationBin[]; partOf: (index: number) => PartOf };

function Bars({ bins, partOf }: Drawn) {
  return bins.map((bin) => <Stack key={bin.from} bin={bin} partOf={partOf} />);
}

function PeakNames({ bins, partOf }: Drawn) {
  const plot = usePlot();
  if (!plot) return null;
  const share = (k: number) => bins[k]?.share ?? 0;
  const peaks = bins.filter((bin, k) => bin.share >= share(k - 1) && bin.share >= share(k + 1));
  const named: PopulationBin[] = [];
  for (const bin of peaks.sort((a, b) => b.share - a.share).slice(0, NAMED_PEAKS)) {
    const free = (other: PopulationBin) => Math.abs(plot.x(other.from) - plot.x(bin.from)) > NAME_WIDTH_PX;
    if (bin.share > LEAST_NAMED && named.every(free)) named.push(bin);
  }
  return named.map((bin) => (
    <ChartText
      key={bin.from}
      x={(plot.x(bin.from) + plot.x(bin.to)) / 2}
      y={plot.y(100 * bin.share) - 6}
      middle
      tone="ink"
      halo
    >
      {bin.parts[0] ? partOf(bin.parts[0].index).name : ""}
    </ChartText>
  ));
}

function Stack({ bin, partOf }: { bin: PopulationBin; partOf: (index: number) => PartOf }) {
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
      population: partOf(part.index).population,
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

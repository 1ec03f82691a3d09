import { depthColour } from "~/components/ui/depth-strip";
import { fixed, formatPercent, plural, withUnit } from "~/lib/format";
import type { MeasureHistogram } from "~/lib/measure/histogram";
import { MEASURE_UNIT, type MeasureKind } from "~/lib/measure/measure";
import type { ConformerRow } from "~/lib/workbench/conformers";
import { joinWords, shareFigure } from "~/lib/workbench/findings";
import { ChartFrame } from "./chart-frame";
import { ChartText, type Choose, Plot, usePlot } from "./plot";

/** Parts thinner than this many pixels are drawn together, in the palest tint. */
const THINNEST = 0.8;
const NAMED = 3;
/** Bars whose conformer is named: the peaks, tallest first, as far as names have room. */
const NAMED_PEAKS = 8;
const NAME_WIDTH_PX = 30;
/** Every 60° that lies in the range. */
const TORSION_TICKS = [-180, -120, -60, 0, 60, 120, 180, 240, 300, 360];

/** How a measured quantity spreads over the ensemble, by population; each conformer in its own tint. */
export function MeasureDistribution({
  histogram,
  kind,
  name,
  rows,
  note,
  onChoose,
}: {
  histogram: MeasureHistogram;
  kind: MeasureKind;
  /** "C3–C4–N5–S6". */
  name: string;
  /** Row of each index in the histogram's parts. */
  rows: readonly ConformerRow[];
  note?: string;
  onChoose: Choose;
}) {
  const { bins } = histogram;
  const unit = MEASURE_UNIT[kind];
  const first = bins[0];
  const last = bins.at(-1);
  if (!first || !last) return null;
  const width = last.to - first.from;
  const highest = bins.reduce((most, bin) => Math.max(most, bin.share), 0);
  const per = `${fixed(first.to - first.from, kind === "distance" ? 2 : first.to - first.from < 1 ? 1 : 0)}${unit === "°" ? "°" : " Å"}`;
  const filled = bins.filter((bin) => bin.share > 0);
  const words = (parts: readonly { index: number }[]) =>
    joinWords(parts.slice(0, NAMED).map((part) => rows[part.index]?.name ?? ""));
  return (
    <ChartFrame
      title={`${{ distance: "Distance", angle: "Angle", torsion: "Torsion" }[kind]} ${name}`}
      fileName={`${kind}-distribution`}
      note={[note, undefinedNote(histogram.undefinedShare)].filter(Boolean).join(" ") || undefined}
      data={{
        columns: [
          { name: "from", unit, digits: kind === "distance" ? 2 : 1 },
          { name: "to", unit, digits: kind === "distance" ? 2 : 1 },
          { name: "population", unit: "%", digits: 1 },
          { name: "most populated there" },
        ],
        rows: filled.map((bin) => [bin.from, bin.to, 100 * bin.share, words(bin.parts)]),
      }}
    >
      <Plot
        label={`Distribution of ${name} by population`}
        height={260}
        x={{
          title: `${kind}, ${unit}`,
          low: first.from - 0.01 * width,
          high: last.to + 0.01 * width,
          ...(kind === "torsion"
            ? { ticks: TORSION_TICKS.filter((tick) => tick >= first.from && tick <= last.to) }
            : {}),
        }}
        y={{ title: `population, % per ${per}`, low: 0, high: 108 * highest }}
        points={filled.map((bin) => ({
          x: (bin.from + bin.to) / 2,
          y: 100 * bin.share,
          frame: rows[bin.parts[0]?.index ?? -1]?.frame,
          label: `${fixed(bin.from, kind === "distance" ? 2 : 1)} to ${withUnit(fixed(bin.to, kind === "distance" ? 2 : 1), unit)}: ${formatPercent(bin.share, 1)}, ${plural(bin.parts.length, "conformer")}, first ${words(bin.parts)}`,
        }))}
        onChoose={onChoose}
      >
        <BarsLayer histogram={histogram} rows={rows} />
      </Plot>
    </ChartFrame>
  );
}

function undefinedNote(share: number): string | null {
  return share > 0
    ? `Undefined in ${shareFigure(share)} of the ensemble: the atoms lie on one line there.`
    : null;
}

function BarsLayer({ histogram, rows }: { histogram: MeasureHistogram; rows: readonly ConformerRow[] }) {
  const plot = usePlot();
  if (!plot) return null;
  const { bins } = histogram;
  const share = (k: number) => bins[k]?.share ?? 0;
  const peaks = bins.filter((bin, k) => bin.share >= share(k - 1) && bin.share >= share(k + 1));
  const tallest: typeof bins = [];
  for (const bin of peaks.sort((a, b) => b.share - a.share).slice(0, NAMED_PEAKS)) {
    const free = (other: (typeof bins)[number]) =>
      Math.abs(plot.x(other.from) - plot.x(bin.from)) > NAME_WIDTH_PX;
    if (tallest.every(free)) tallest.push(bin);
  }
  return (
    <g>
      {histogram.bins.map((bin) => {
        const x = plot.x(bin.from) + 0.4;
        const width = Math.max(0.5, plot.x(bin.to) - plot.x(bin.from) - 0.8);
        return <Stack key={bin.from} bin={bin} x={x} width={width} rows={rows} />;
      })}
      {tallest.map((bin) => {
        const row = rows[bin.parts[0]?.index ?? -1];
        return row && bin.share > 0.02 ? (
          <ChartText
            key={bin.from}
            x={(plot.x(bin.from) + plot.x(bin.to)) / 2}
            y={plot.y(100 * bin.share) - 6}
            middle
            tone="ink"
            halo
          >
            {row.name}
          </ChartText>
        ) : null;
      })}
    </g>
  );
}

function Stack({
  bin,
  x,
  width,
  rows,
}: {
  bin: MeasureHistogram["bins"][number];
  x: number;
  width: number;
  rows: readonly ConformerRow[];
}) {
  const plot = usePlot();
  if (!plot || bin.share === 0) return null;
  const base = plot.y(0);
  const perShare = base - plot.y(100);
  let below = 0;
  const blocks: { y: number; height: number; population: number }[] = [];
  for (const part of bin.parts) {
    const height = part.share * perShare;
    if (height < THINNEST) break;
    const population = rows[part.index]?.population ?? 0;
    blocks.push({
      y: base - (below + part.share) * perShare,
      height: Math.max(0.3, height - 0.8),
      population,
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

import { ChartFrame } from "~/components/charts/chart-frame";
import { depthColour } from "~/components/ui/depth-strip";
import type { Contribution } from "~/lib/averages/contributions";
import { digitsFor } from "~/lib/averages/words";
import { fixed, formatPercent, plural } from "~/lib/format";
import { conformerName } from "~/lib/workbench/conformers";
import { type ChartRow, RowChart } from "./row-chart";
import type { AveragedProperty } from "./use-averages";
import type { WeighedConformers } from "./use-weighed";

/** Conformers drawn; the rest is one outline. */
const MOST = 7;

/** What makes an average: share of the average as a bar, population as a ring, the average without each. */
export function ContributionChart({
  averaged,
  list,
  weighed,
  selected,
  onChoose,
}: {
  averaged: AveragedProperty;
  list: readonly Contribution[];
  weighed: WeighedConformers;
  selected: ReadonlySet<number>;
  onChoose: (frame: number) => void;
}) {
  const { property } = averaged;
  const unit = property.unit ?? undefined;
  const digits = digitsFor(property.unit, averaged.average.value);
  const byShare = list.every((one) => one.value === null || one.share !== null);
  const sizeOf = (one: Contribution) => (byShare ? (one.share ?? 0) : one.population);
  const ranked = list
    .filter((one) => one.value !== null)
    .sort((a, b) => sizeOf(b) - sizeOf(a) || a.index - b.index);
  const shown = ranked.slice(0, MOST);
  const rest = ranked.slice(MOST);
  const high =
    1.06 *
    100 *
    Math.max(0.05, ...shown.map((one) => Math.max(sizeOf(one), one.population)), total(rest, sizeOf));
  const rows = shown.map((one): ChartRow => {
    const frame = weighed.kept[one.index]?.frame ?? 0;
    const name = conformerName(weighed.places[one.index] ?? 0);
    const size = 100 * sizeOf(one);
    return {
      key: name,
      label: name,
      before: fixed(one.value, digits),
      after: [fixed(size, 1), fixed(one.without, digits)],
      selected: selected.has(frame),
      words: `${name}: ${fixed(one.value, digits)} ${unit ?? ""}, ${formatPercent(sizeOf(one), 1)} of the average, population ${formatPercent(one.population, 1)}, without it ${fixed(one.without, digits)}`,
      onChoose: () => onChoose(frame),
      draw: ({ x }, y) => (
        <>
          <rect x={x(0)} y={y - 6} width={x(size) - x(0)} height={12} fill={depthColour(one.population)} />
          <path d={`M${x(size)} ${y - 8}v16`} stroke="var(--color-ink)" strokeWidth={1.5} />
          <circle
            cx={x(100 * one.population)}
            cy={y}
            r={4}
            fill="var(--color-paper)"
            stroke="var(--color-ink)"
            strokeWidth={1.5}
          />
        </>
      ),
    };
  });
  if (rest.length > 0) {
    const size = 100 * total(rest, sizeOf);
    const population = 100 * total(rest, (one) => one.population);
    rows.push({
      key: "rest",
      label: `${rest.length} more`,
      after: [fixed(size, 1), ""],
      words: `${plural(rest.length, "further conformer")}: ${fixed(size, 1)} %`,
      draw: ({ x }, y) => (
        <>
          <rect
            x={x(0)}
            y={y - 6}
            width={x(size) - x(0)}
            height={12}
            fill="none"
            stroke="var(--color-ink-3)"
          />
          <circle
            cx={x(population)}
            cy={y}
            r={4}
            fill="var(--color-paper)"
            stroke="var(--color-ink)"
            strokeWidth={1.5}
          />
        </>
      ),
    });
  }
  return (
    <ChartFrame
      title={`What makes the average: ${property.name}`}
      fileName="contributions"
      note={
        byShare
          ? "Bar: share of the average. Ring: population."
          : "Bar and ring: population. Values of both signs, or angles, share no average between them."
      }
      data={{
        columns: [
          { name: "conformer" },
          { name: "frame", digits: 0 },
          { name: "value", unit, digits },
          { name: "population", unit: "%", digits: 1 },
          { name: "share of the average", unit: "%", digits: 1 },
          { name: "average without it", unit, digits },
          { name: "sensitivity", unit: unit ? `${unit} per kcal/mol` : "per kcal/mol", digits: digits + 1 },
        ],
        rows: ranked.map((one) => [
          conformerName(weighed.places[one.index] ?? 0),
          weighed.kept[one.index]?.frame ?? null,
          one.value,
          100 * one.population,
          one.share === null ? null : 100 * one.share,
          one.without,
          one.sensitivity,
        ]),
      }}
    >
      <RowChart
        label={`What makes the average of ${property.name}`}
        rows={rows}
        high={high}
        axis={byShare ? "share and population, %" : "population, %"}
        beforeWidth={52}
        afterWidth={54}
        heads={{ before: unit ?? "value", after: [byShare ? "share, %" : "pop., %", "without"] }}
      />
    </ChartFrame>
  );
}

function total(list: readonly Contribution[], of: (one: Contribution) => number): number {
  return list.reduce((sum, one) => sum + of(one), 0);
}

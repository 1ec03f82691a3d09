import { ChartFrame } from "~/components/charts/chart-frame";
import { ChartText, Plot, usePlot } from "~/components/charts/plot";
import { Skeleton } from "~/components/ui/skeleton";
import { fixed, formatCount, formatEnergy, plural, withUnit } from "~/lib/format";
import type { ToleranceCounts } from "~/lib/sift/count-against-tolerance";
import {
  type CountedTolerance,
  countedTolerances,
  type Plateau,
  plateauAround,
  toleranceText,
} from "~/lib/workbench/plateau";
import { roundTicks } from "~/lib/workbench/ticks";

/** Counts higher than so many times the one at hand would flatten what lies around it: they run out of the picture. */
const HEADROOM = 4;
const TITLE = "How the count hangs on the tolerance";

/** Distinct conformers against the RMSD tolerance, at half, one and two times the energy tolerance. */
export function PlateauChart({
  counts,
  here,
  energyTolerance,
  stale,
  note,
  onTake,
}: {
  counts: ToleranceCounts;
  /** The tolerance at hand with its count; null while that is being counted. */
  here: CountedTolerance | null;
  /** kcal/mol; null: none. */
  energyTolerance: number | null;
  /** The counts are of other settings, until the new ones are there. */
  stale: boolean;
  note?: string;
  /** Takes a counted tolerance; absent for who may not. */
  onTake?: (tolerance: number) => void;
}) {
  const points = countedTolerances(counts, here);
  const plateau = here ? plateauAround(points, here.tolerance) : null;
  const widest = Math.max(1, (here?.tolerance ?? 0) * 1.1, ...counts.rmsdTolerances);
  const most = Math.max(...points.map(({ count }) => count), ...counts.counts.flat());
  const reference = here?.count ?? points[Math.floor(points.length / 2)]?.count ?? most;
  const top = Math.max(4, Math.min(1.15 * most, HEADROOM * Math.max(1, reference)));
  const names = counts.energyFactors.map((factor) =>
    energyTolerance === null
      ? "distinct conformers"
      : `at ${withUnit(fine(factor * energyTolerance), "kcal/mol")}`,
  );
  return (
    <div className={stale ? "opacity-50 transition-opacity" : "transition-opacity"} aria-busy={stale}>
      <ChartFrame
        ofPopulations={false}
        title={TITLE}
        fileName="count-against-tolerance"
        note={note}
        data={{
          columns: [
            { name: "RMSD tolerance", unit: "Å", digits: 3 },
            ...names.map((name) => ({ name, digits: 0 })),
          ],
          rows: counts.rmsdTolerances.map((tolerance, t) => [
            tolerance,
            ...counts.counts.map((line) => line[t] ?? null),
          ]),
        }}
      >
        <Plot
          label={`Distinct conformers against the RMSD tolerance${here ? `: ${formatCount(here.count)} at ${withUnit(toleranceText(here.tolerance), "Å")}` : ""}`}
          height={260}
          axisWidth={most >= 1000 ? 44 : 36}
          x={{
            title: "RMSD tolerance, Å",
            low: -0.02 * widest,
            // Room at the right for the ends of the lines.
            high: counts.energyFactors.length > 1 ? 1.38 * widest : widest,
            ticks: roundTicks(0, widest, 5),
          }}
          y={{ title: "distinct conformers", low: 0, high: top }}
          points={points
            .filter(({ count }) => count <= top)
            .map(({ tolerance, count }) => ({
              x: tolerance,
              y: count,
              label: `${withUnit(toleranceText(tolerance), "Å")}: ${plural(count, "conformer")}`,
              // A point is chosen by its tolerance in thousandths of an Å, the whole number that a point may carry.
              ...(onTake ? { frame: Math.round(1000 * tolerance) } : {}),
            }))}
          onChoose={onTake ? (thousandths) => onTake(thousandths / 1000) : undefined}
        >
          <Lines
            counts={counts}
            points={points}
            here={here}
            plateau={plateau}
            energyTolerance={energyTolerance}
            top={top}
            widest={widest}
          />
        </Plot>
      </ChartFrame>
    </div>
  );
}

/** Half of 0.15 is 0.075. */
const fine = (energyKcal: number) =>
  energyKcal * 100 === Math.round(energyKcal * 100) ? formatEnergy(energyKcal) : fixed(energyKcal, 3);

/** Holds the place of the chart while the frames are fetched or counted. */
export function PlateauPlace({ children }: { children: React.ReactNode }) {
  return (
    <div className="min-w-0 print:hidden">
      <h3 className="mb-2 text-sm font-semibold">{TITLE}</h3>
      <div className="relative">
        <Skeleton className="h-72 w-full" />
        <div className="absolute inset-0 grid place-content-center justify-items-center gap-3 p-6 text-center text-ink-2">
          {children}
        </div>
      </div>
    </div>
  );
}

/** Factors other than 1 are drawn thin: shorter dashes for the narrower one. */
const DASH: Record<number, string> = { 0.5: "2 3", 2: "6 3" };

function Lines({
  counts,
  points,
  here,
  plateau,
  energyTolerance,
  top,
  widest,
}: {
  counts: ToleranceCounts;
  points: readonly CountedTolerance[];
  here: CountedTolerance | null;
  plateau: Plateau | null;
  energyTolerance: number | null;
  top: number;
  widest: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const y = (count: number) => (count > top ? plot.top - 20 : plot.y(count));
  const path = (line: readonly CountedTolerance[]) => {
    const steps = line.map(({ tolerance, count }, k) =>
      k === 0 ? `M${plot.x(tolerance)} ${y(count)}` : `H${plot.x(tolerance)}V${y(count)}`,
    );
    return `${steps.join("")}H${plot.x(widest)}`;
  };
  const lines = counts.energyFactors.map((factor, f) => ({
    factor,
    line:
      factor === 1
        ? points
        : counts.rmsdTolerances.map((tolerance, t) => ({ tolerance, count: counts.counts[f]?.[t] ?? 0 })),
  }));
  const off = points.filter(({ count }) => count > top).at(-1);
  const clip = "plateau-area";
  return (
    <g>
      <clipPath id={clip}>
        <rect x={plot.left} y={plot.top} width={plot.right - plot.left} height={plot.bottom - plot.top} />
      </clipPath>
      {plateau ? (
        <>
          <rect
            x={plot.x(plateau.from)}
            y={plot.top}
            width={plot.x(plateau.to) - plot.x(plateau.from)}
            height={plot.bottom - plot.top}
            fill="var(--color-depth-1)"
            opacity={0.55}
          />
          <path
            d={`M${plot.x(plateau.from)} ${plot.bottom - 12}H${plot.x(plateau.to)}m0 -3v6M${plot.x(plateau.from)} ${plot.bottom - 15}v6`}
            stroke="var(--color-ink-3)"
            fill="none"
          />
        </>
      ) : null}
      <g clipPath={`url(#${clip})`}>
        {lines.map(({ factor, line }) => (
          <path
            key={factor}
            d={path(line)}
            fill="none"
            stroke={factor === 1 ? "var(--color-depth-6)" : "var(--color-ink-3)"}
            strokeWidth={factor === 1 ? 2.2 : 1.2}
            strokeDasharray={DASH[factor]}
          />
        ))}
        {points.map(({ tolerance, count }) =>
          count > top ? null : (
            <circle key={tolerance} cx={plot.x(tolerance)} cy={y(count)} r={2} fill="var(--color-depth-6)" />
          ),
        )}
      </g>
      {here ? (
        // Below all labels, whose halo keeps them readable over it.
        <path
          d={`M${plot.x(here.tolerance)} ${plot.top}V${plot.bottom}`}
          stroke="var(--color-mark)"
          strokeWidth={1.2}
          strokeDasharray="5 4"
        />
      ) : null}
      {off ? (
        // The axis ends below the counts of the narrowest tolerances.
        <ChartText x={plot.x(off.tolerance) + 6} y={plot.top + 10} halo>
          {`↑ ${formatCount(off.count)} at ${withUnit(toleranceText(off.tolerance), "Å")}`}
        </ChartText>
      ) : null}
      {energyTolerance !== null && lines.length > 1 ? (
        <EndLabels
          widest={widest}
          ends={lines.map(({ factor, line }) => ({
            chosen: factor === 1,
            tolerance: fine(factor * energyTolerance),
            count: formatCount(line.at(-1)?.count),
            y: y(line.at(-1)?.count ?? 0),
          }))}
        />
      ) : null}
      {plateau ? (
        <ChartText
          x={plot.x(plateau.to) + (plateau.to > 0.6 * widest ? -6 : 6)}
          y={plot.bottom - (plateau.to > 0.6 * widest ? 20 : 8)}
          end={plateau.to > 0.6 * widest}
          halo
        >
          {`plateau, ${toleranceText(plateau.from)} to ${withUnit(toleranceText(plateau.to), "Å")}`}
        </ChartText>
      ) : null}
      {here ? (
        <>
          <circle cx={plot.x(here.tolerance)} cy={y(here.count)} r={4.5} fill="var(--color-mark)" />
          <ChartText
            x={plot.x(here.tolerance) + (here.tolerance > 0.7 * widest ? -9 : 9)}
            y={Math.max(plot.top + 12, y(here.count) - 9)}
            end={here.tolerance > 0.7 * widest}
            tone="mark"
            halo
          >
            {`${withUnit(toleranceText(here.tolerance), "Å")}: ${formatCount(here.count)}`}
          </ChartText>
        </>
      ) : null}
    </g>
  );
}

/** Pixels that "0.075 kcal/mol: 25" takes. */
const END_LABEL_PX = 118;

/**
 * "0.30 kcal/mol: 19" at the right end of each line, moved apart where they would lie on one another. Where there is
 * no room for it the unit stands once, above them.
 */
function EndLabels({
  ends,
  widest,
}: {
  ends: { chosen: boolean; tolerance: string; count: string; y: number }[];
  widest: number;
}) {
  const plot = usePlot();
  if (!plot) return null;
  const sorted = [...ends].sort((a, b) => a.y - b.y);
  const wide = plot.right - plot.x(widest) >= END_LABEL_PX;
  const first = sorted[0];
  // Labels end above the axis, whose ticks they would cover, and begin below the links over the picture.
  const lowest = plot.bottom - 4 - 14 * (sorted.length - 1) - 10;
  let last = Number.NEGATIVE_INFINITY;
  return (
    <g>
      {wide || first === undefined ? null : (
        <ChartText x={plot.x(widest) + 6} y={Math.max(plot.top - 6, Math.min(first.y - 10, lowest - 4))} halo>
          kcal/mol
        </ChartText>
      )}
      {sorted.map((end, k) => {
        last = Math.max(plot.top, Math.min(Math.max(end.y - 6, last + 14), lowest + 14 * k));
        return (
          <ChartText
            key={end.tolerance}
            x={plot.x(widest) + 6}
            y={last + 10}
            tone={end.chosen ? "ink" : "plain"}
            halo
          >
            {`${wide ? withUnit(end.tolerance, "kcal/mol") : end.tolerance}: ${end.count}`}
          </ChartText>
        );
      })}
    </g>
  );
}

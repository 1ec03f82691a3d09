import { href, useLocation } from "react-router";
import { BlockHead } from "~/components/ui/finding";
import { Note } from "~/components/ui/note";
import { Skeleton } from "~/components/ui/skeleton";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { TextLink } from "~/components/ui/text-link";
import { useWorkbench } from "~/components/workbench/workbench-context";
import {
  ABSENT,
  formatCount,
  formatEnergy,
  formatPercent,
  formatWindowToCarry,
  plural,
  withUnit,
} from "~/lib/format";
import { type ComparisonIntervals, FEWEST_RESAMPLED, windowInterval } from "~/lib/levels/intervals";
import { keptWithin, narrowestWindow, nextWindow } from "~/lib/levels/window";
import { bandWithin, type WindowBand } from "~/lib/levels/window-band";
import type { Comparison } from "./use-comparison";

/** Window and conformers for 90, 95, 99 % and the share that is asked for, with what is uncertain about them. */
export function WindowTable({
  found,
  intervals,
  resampled,
  band,
}: {
  found: Comparison;
  intervals: ComparisonIntervals | null;
  /** False where there are too many conformers for intervals: none are coming. */
  resampled: boolean;
  band: WindowBand | null;
}) {
  const { ensemble, state } = useWorkbench();
  const { search } = useLocation();
  const { comparison, steps, window, paired, meeting, level, reference } = found;
  const shares = [...new Set([...comparison.window.map((w) => w.share), window.share, 1])].sort(
    (a, b) => a - b,
  );
  const rows = shares.map((share) => ({ ...narrowestWindow(steps, share), share }));
  const few = comparison.n < FEWEST_RESAMPLED;
  return (
    <div className="min-w-0 break-inside-avoid">
      <BlockHead title="How wide to carry" />
      <Table aria-label="Window and conformers for a share of the reference population">
        <thead>
          <tr>
            <Th>Keep</Th>
            <Th align="right" unit="kcal/mol">
              Window
            </Th>
            <Th align="right" unit="bootstrap" className="max-sm:hidden">
              95 % interval
            </Th>
            <Th align="right">Conformers</Th>
            <Th align="right" unit="of the draws">
              Lowest kept
            </Th>
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => {
            const interval = intervals ? windowInterval(intervals, row.share) : null;
            const within = band ? bandWithin(band, row.kcal) : null;
            return (
              <Tr key={row.share} selected={row.share === window.share} data-share={row.share}>
                <Td>
                  {row.share === 1
                    ? "all"
                    : formatPercent(row.share, row.share * 100 === Math.round(row.share * 100) ? 0 : 1)}
                </Td>
                <Td align="right">{carried(row.kcal)}</Td>
                <Td align="right" className="text-ink-2 max-sm:hidden">
                  {interval ? (
                    `${formatWindowToCarry(interval.low)} to ${formatWindowToCarry(interval.high)}`
                  ) : intervals === null && resampled && !few && row.share < 1 ? (
                    <Skeleton className="ml-auto h-3 w-16" />
                  ) : (
                    ABSENT
                  )}
                </Td>
                <Td align="right">{formatCount(row.count)}</Td>
                <Td align="right" className="text-ink-2">
                  {within ? formatPercent(within.lowestKept, 1) : ABSENT}
                </Td>
              </Tr>
            );
          })}
        </tbody>
      </Table>
      <p className="mt-2 max-w-read text-xs text-ink-3">
        {lowestWords()} {bandWords()}{" "}
        <TextLink
          className="print:hidden"
          to={{ pathname: href("/ensembles/:id/plan", { id: ensemble.id }), search }}
        >
          Make a plan
        </TextLink>
        {ensemble.role === "guest" ? null : (
          <>
            <span className="print:hidden"> · </span>
            <TextLink
              className="print:hidden"
              to={`${href("/teams/:team/windows", { team: ensemble.team.id })}?${new URLSearchParams({ series: ensemble.series.id, level: level.name, ref: reference.name })}`}
            >
              The window for the whole series
            </TextLink>
          </>
        )}
      </p>
      <Note className="mt-4">
        Best case: a window cannot bring back what the sampler never found, and {reference.name} is taken as
        it is. Windows are rounded up, so that the printed number keeps what is said of it.
      </Note>
    </div>
  );

  /** As printed: what the row says of a window holds for these digits. */
  function carried(kcal: number): string {
    return formatWindowToCarry(kcal, nextWindow(steps, kcal));
  }

  function lowestWords(): string {
    const name = paired.members[meeting.referenceLowest]?.name ?? "";
    const kept = keptWithin(steps, window.kcal);
    const is = meeting.aboveAtLevel <= window.kcal ? "is within" : "lies outside";
    const lowest = found.covered.lowest ? "The lowest of those compared" : "The lowest";
    return `${lowest} at ${reference.name}, ${name}, ${is} ${withUnit(carried(window.kcal), "kcal/mol")} of ${level.name}, which keeps ${formatPercent(kept.kept, 1)} in ${plural(kept.count, "conformer")}.`;
  }

  function bandWords(): string {
    if (state.compare.sigmaKcal === 0) return `The energies of ${reference.name} are taken as exact.`;
    const sigma = withUnit(formatEnergy(state.compare.sigmaKcal), "kcal/mol");
    if (!band) return `With an error of ${sigma} on ${reference.name}, ranges are being drawn.`;
    const at = bandWithin(band, window.kcal);
    const [low, high] = at ? [formatPercent(at.low), formatPercent(at.high)] : [];
    const range = at
      ? ` that window keeps ${low === high ? low : `${low} to ${high}`} of the true population`
      : "";
    return `With an independent error of ${sigma} on each energy of ${reference.name},${range} (95 % of ${formatCount(band.draws)} draws, ${band.generator}, seed ${band.seed}).`;
  }
}

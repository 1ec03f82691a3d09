import type { ReactNode } from "react";
import { href, Link } from "react-router";
import { Badge } from "~/components/ui/badge";
import { DepthStrip } from "~/components/ui/depth-strip";
import { Formula } from "~/components/ui/formula";
import { LevelMarker } from "~/components/ui/level-marker";
import { Table, Td, Th, Tr } from "~/components/ui/table";
import { ABSENT, fixed, formatCount, formatMoment, formatPopulation, plural } from "~/lib/format";
import { nextSort, rowState, type SeriesState, type SortKey, writeSeriesState } from "~/lib/series-state";
import type { EnsembleRow } from "~/lib/views";
import { SiftProgress } from "./sift-progress";

// Columns leave in a fixed order: below 1280 the series, effective number and change, below 640 all but name, strip, share.
const MID = "max-xl:hidden";
const WIDE = "max-sm:hidden";

/** The table of ensembles: every column sorts by address, the strip gives way to progress or the open question. */
export function EnsembleTable({
  rows,
  state,
  now,
  showSeries,
  acts,
}: {
  rows: readonly EnsembleRow[];
  state: SeriesState;
  now: string;
  showSeries: boolean;
  /** The menu at the end of a row; null where the person may change nothing. */
  acts: ((row: EnsembleRow) => ReactNode) | null;
}) {
  const head = (by: SortKey) => ({
    sort: state.sort.by === by ? (state.sort.down ? ("down" as const) : ("up" as const)) : null,
    sortTo: `?${writeSeriesState({ ...state, sort: nextSort(state.sort, by), page: 1 })}`,
  });
  return (
    <Table aria-label="Ensembles" className="max-sm:table-fixed">
      <thead>
        <tr>
          <Th {...head("name")} className="max-sm:pl-0">
            Ensemble
          </Th>
          {showSeries ? (
            <Th {...head("series")} className={MID}>
              Series
            </Th>
          ) : null}
          <Th {...head("formula")} className={WIDE}>
            Formula
          </Th>
          <Th {...head("frames")} align="right" className={WIDE}>
            Frames
          </Th>
          <Th {...head("held")} className={WIDE}>
            Held
          </Th>
          <Th {...head("distinct")} align="right" className={WIDE}>
            Distinct
          </Th>
          <Th {...head("strip")} unit="shares at 298.15 K" className="max-sm:w-29">
            Depth strip
          </Th>
          <Th {...head("lowest")} align="right" unit="%" className="max-sm:w-12">
            Lowest
          </Th>
          <Th {...head("effective")} align="right" unit="number" className={`${WIDE} ${MID}`}>
            Effective
          </Th>
          <Th {...head("levels")} className={WIDE}>
            Levels
          </Th>
          <Th {...head("changed")} className={`${WIDE} ${MID}`}>
            Changed
          </Th>
          {acts ? (
            <Th className="w-12 px-0 max-sm:w-9 max-sm:px-0">
              <span className="sr-only">Acts</span>
            </Th>
          ) : null}
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => (
          <EnsembleLine key={row.id} row={row} now={now} showSeries={showSeries} acts={acts?.(row)} />
        ))}
      </tbody>
    </Table>
  );
}

function EnsembleLine({
  row,
  now,
  showSeries,
  acts,
}: {
  row: EnsembleRow;
  now: string;
  showSeries: boolean;
  acts: ReactNode;
}) {
  const sift = row.sift;
  return (
    <Tr className="hover:bg-sheet">
      <Td tall wrap className="max-w-96 max-sm:pl-0">
        <Link
          to={href("/ensembles/:id", { id: row.id })}
          className="font-medium break-words text-ink no-underline hover:underline"
        >
          {row.name}
        </Link>
        <div className="text-xs text-ink-3 sm:hidden">
          <Formula>{row.formula}</Formula> ·{" "}
          {sift?.distinct == null ? ABSENT : `${formatCount(sift.distinct)} distinct`}
        </div>
      </Td>
      {showSeries ? (
        <Td tall className={`${MID} text-ink-2`}>
          {row.series.name}
        </Td>
      ) : null}
      <Td tall className={`${WIDE} text-ink-2`}>
        <Formula>{row.formula}</Formula>
      </Td>
      <Td tall align="right" className={WIDE}>
        {formatCount(row.frames)}
      </Td>
      <Td tall className={WIDE}>
        <HeldCell held={row.held - row.waiting} waiting={row.waiting} />
      </Td>
      <Td tall align="right" className={WIDE}>
        {formatCount(sift?.distinct)}
        {sift && sift.changed.length > 0 ? (
          <div
            className="text-xs whitespace-nowrap text-ink-3"
            title={`Not the default settings: ${sift.changed.join(", ")}`}
          >
            settings changed
          </div>
        ) : null}
      </Td>
      <Td tall className="sm:w-44 xl:w-60">
        <StripCell row={row} />
      </Td>
      <Td tall align="right">
        {formatPopulation(sift?.lowest, 0)}
      </Td>
      <Td tall align="right" className={`${WIDE} ${MID}`}>
        {fixed(sift?.effectiveCount, 1)}
      </Td>
      <Td tall className={WIDE}>
        <LevelMarkers levels={row.levels} />
      </Td>
      <Td tall className={`${WIDE} ${MID} text-ink-3`}>
        {formatMoment(row.changedAt, now)}
      </Td>
      {acts ? (
        <Td tall className="px-0 text-right max-sm:px-0">
          {acts}
        </Td>
      ) : null}
    </Tr>
  );
}

/** Held for a reason of their own; what only waits for an answer is not held, it waits. */
function HeldCell({ held, waiting }: { held: number; waiting: number }) {
  if (held === 0 && waiting === 0) return <span className="text-ink-3">{ABSENT}</span>;
  return (
    <span className="inline-flex flex-wrap gap-1">
      {held > 0 ? (
        <Badge tone="held" title={`${plural(held, "frame")} held`}>
          {formatCount(held)}
        </Badge>
      ) : null}
      {waiting > 0 ? (
        <Badge tone="ask" title={`${plural(waiting, "frame waits", "frames wait")} for an answer`}>
          {formatCount(waiting)} wait{waiting === 1 ? "s" : ""}
        </Badge>
      ) : null}
    </span>
  );
}

/** Populations, or what stands in their way. */
function StripCell({ row }: { row: EnsembleRow }) {
  const quiet = (words: string) => <span className="text-xs whitespace-normal text-ink-3">{words}</span>;
  switch (rowState(row)) {
    case "asks":
      return <Badge tone="ask">{plural(row.openQuestions, "question")} open</Badge>;
    case "running":
      return row.sift ? <SiftProgress sift={row.sift} /> : null;
    case "failed":
      return <Badge tone="danger">sift failed</Badge>;
    case "open":
      return quiet("not sifted yet");
    case "ready":
      if (!row.sift || row.sift.shares.length === 0) return quiet("no energies, no populations");
      return <DepthStrip shares={row.sift.shares} conformers={row.sift.distinct ?? undefined} />;
  }
}

function LevelMarkers({ levels }: { levels: EnsembleRow["levels"] }) {
  if (levels.length === 0) return <span className="text-ink-3">{ABSENT}</span>;
  return (
    <ul className="flex gap-2">
      {levels.map((level) => (
        <li key={level.ordinal} title={level.name} className="flex items-center gap-2">
          <LevelMarker ordinal={level.ordinal} />
          <span className={levels.length > 1 ? "sr-only" : "max-w-24 truncate text-xs"}>{level.name}</span>
        </li>
      ))}
    </ul>
  );
}

import { KeyRound, Link2 } from "lucide-react";
import { Link, useLocation } from "react-router";
import { Badge, type BadgeTone } from "~/components/ui/badge";
import { linkClass } from "~/components/ui/text-link";
import { formatCount, formatDate, formatTime } from "~/lib/format";
import type { LogbookRow } from "~/lib/views";

/** Entries by day, newest first. Times are UTC. */
export function LogbookList({
  rows,
  older,
  total,
  ensembles = false,
}: {
  rows: readonly LogbookRow[];
  older: number | null;
  total: number;
  /** Names the ensemble of an entry: in the logbook of a team. */
  ensembles?: boolean;
}) {
  const { pathname, search } = useLocation();
  return (
    <>
      {byDay(rows).map(([day, entries]) => (
        <section key={day} className="mt-7">
          <h3 className="border-b border-rule-2 pb-2 text-sm font-semibold">{day}</h3>
          <ul>
            {entries.map((entry) => (
              <Entry key={entry.id} entry={entry} ensembles={ensembles} />
            ))}
          </ul>
        </section>
      ))}
      <p className="figures mt-6 text-ink-2">
        {older === null ? null : (
          <>
            <Link className={linkClass} to={`${pathname}${olderSearch(search, older)}`}>
              Show older
            </Link>{" "}
            ·{" "}
          </>
        )}
        {formatCount(rows.length)} of {formatCount(total)} shown
      </p>
    </>
  );
}

/** Entries by UTC day, both in the order given. */
function byDay(rows: readonly LogbookRow[]): [string, LogbookRow[]][] {
  const days: [string, LogbookRow[]][] = [];
  for (const row of rows) {
    const day = formatDate(row.at);
    const last = days.at(-1);
    if (last?.[0] === day) last[1].push(row);
    else days.push([day, [row]]);
  }
  return days;
}

function olderSearch(search: string, before: number): string {
  const params = new URLSearchParams(search);
  params.set("before", String(before));
  return `?${params}`;
}

function initials(name: string): string {
  const words = name.split(/\s+/).filter(Boolean);
  return `${words[0]?.charAt(0) ?? ""}${words.length > 1 ? (words.at(-1)?.charAt(0) ?? "") : ""}`.toUpperCase();
}

/** Kinds are plain but for what waits or was said. */
const TONES: Partial<Record<LogbookRow["kind"], BadgeTone>> = { held: "held", remark: "remark" };

function Entry({ entry, ensembles }: { entry: LogbookRow; ensembles: boolean }) {
  return (
    <li className="figures grid gap-x-4 gap-y-1 border-b border-rule py-3 sm:grid-cols-[3.5rem_minmax(0,1fr)] xl:grid-cols-[3.5rem_12rem_minmax(0,1fr)_5.5rem_4rem]">
      <time dateTime={entry.at} className="text-ink-3">
        {formatTime(entry.at)}
      </time>
      <span className="-my-0.5 flex min-w-0 items-center gap-3 self-start text-ink-2 sm:max-xl:col-start-2 sm:max-xl:row-start-2">
        <span
          aria-hidden="true"
          className="grid size-6 shrink-0 place-items-center rounded-full border border-edge text-xs text-ink-2"
        >
          {entry.by === "token" ? (
            <KeyRound className="size-3" />
          ) : entry.by === "link" ? (
            <Link2 className="size-3" />
          ) : (
            initials(entry.who)
          )}
        </span>
        <span className="truncate">{entry.who}</span>
        <span className="ml-auto xl:hidden">
          <Badge tone={TONES[entry.kind]}>{entry.kind}</Badge>
        </span>
      </span>
      <span className="min-w-0 sm:max-xl:col-start-2 sm:max-xl:row-start-1">
        <span className="block break-words">{entry.text}</span>
        {entry.detail ? <span className="block text-xs break-words text-ink-3">{entry.detail}</span> : null}
        {ensembles && entry.ensemble ? (
          <span className="block text-xs break-words text-ink-3">{entry.ensemble}</span>
        ) : null}
      </span>
      <span className="max-xl:hidden">
        <Badge tone={TONES[entry.kind]}>{entry.kind}</Badge>
      </span>
      <span className="text-xs text-ink-3 max-xl:hidden">{entry.from}</span>
    </li>
  );
}

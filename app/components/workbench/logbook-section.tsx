import { KeyRound } from "lucide-react";
import { href, Link, useLocation } from "react-router";
import { buttonClass } from "~/components/ui/button";
import { Finding, SectionHead } from "~/components/ui/finding";
import { formatDate, formatTime, plural, pluralWord } from "~/lib/format";
import type { LogbookRow } from "~/lib/views";
import { useWorkbench } from "./workbench-context";

/** Who did and decided what, by day, newest first. Times are UTC. */
export function LogbookSection({ rows, older }: { rows: readonly LogbookRow[]; older: number | null }) {
  const { ensemble } = useWorkbench();
  const { search } = useLocation();
  const days = byDay(rows);
  const first = rows.at(-1);
  const people = new Set(rows.filter((row) => row.by === "person").map((row) => row.who)).size;
  const tokens = new Set(rows.filter((row) => row.by === "token").map((row) => row.who)).size;
  const by = [
    people > 0 ? pluralWord(people, "person", "people") : null,
    tokens > 0 ? pluralWord(tokens, "token") : null,
  ].filter((part) => part !== null);
  return (
    <section aria-labelledby="section-title">
      <SectionHead id="section-title" title="Logbook" />
      {first === undefined ? (
        <Finding>Nothing was decided yet.</Finding>
      ) : (
        <Finding more="Nothing in it can be changed or removed. Times are UTC.">
          {older === null
            ? plural(rows.length, "entry", "entries")
            : `The newest ${plural(rows.length, "entry", "entries")}`}{" "}
          since {formatDate(first.at)}
          {by.length > 0 ? `, by ${by.join(" and ")}` : ""}.
        </Finding>
      )}
      {days.map(([day, entries]) => (
        <section key={day} className="mt-7">
          <h3 className="border-b border-rule-2 pb-2 text-sm font-semibold">{day}</h3>
          <ul>
            {entries.map((entry) => (
              <Entry key={entry.id} entry={entry} />
            ))}
          </ul>
        </section>
      ))}
      {older === null ? null : (
        <p className="mt-6">
          <Link
            className={buttonClass({})}
            to={`${href("/ensembles/:id/logbook", { id: ensemble.id })}${olderSearch(search, older)}`}
          >
            Older entries
          </Link>
        </p>
      )}
    </section>
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

function Entry({ entry }: { entry: LogbookRow }) {
  return (
    <li className="figures grid gap-x-4 gap-y-1 border-b border-rule py-3 sm:grid-cols-[3.5rem_minmax(0,1fr)] xl:grid-cols-[3.5rem_14rem_minmax(0,1fr)]">
      <time dateTime={entry.at} className="text-ink-3">
        {formatTime(entry.at)}
      </time>
      <span className="-my-0.5 flex min-w-0 items-center gap-3 self-start text-ink-2 sm:max-xl:col-start-2 sm:max-xl:row-start-2">
        <span
          aria-hidden="true"
          className="grid size-6 shrink-0 place-items-center rounded-full border border-edge text-xs text-ink-2"
        >
          {entry.by === "token" ? <KeyRound className="size-3" /> : initials(entry.who)}
        </span>
        <span className="truncate">{entry.who}</span>
      </span>
      <span className="min-w-0 sm:max-xl:col-start-2 sm:max-xl:row-start-1">
        <span className="block break-words">{entry.text}</span>
        {entry.detail ? <span className="block text-xs break-words text-ink-3">{entry.detail}</span> : null}
      </span>
    </li>
  );
}

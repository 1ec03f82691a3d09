import { formatDate, formatTime } from "~/lib/format";
import type { SharedEntry } from "~/services/links/load-shared.server";
import { EditionHead } from "./edition-head";

const BY: Record<SharedEntry["by"], string> = {
  person: "a member of the team",
  token: "a program of the team",
  product: "Lowlying",
};

/** What was decided on the ensemble up to the edition, without names. */
export function SharedLogbook({ entries }: { entries: readonly SharedEntry[] }) {
  return (
    <section className="mt-10" aria-labelledby="edition-logbook">
      <EditionHead id="edition-logbook">How it came about</EditionHead>
      <ul className="mt-3 border-t border-rule">
        {entries.map((entry, k) => (
          <li
            key={k}
            className="figures grid gap-x-4 gap-y-1 border-b border-rule py-2 sm:grid-cols-[11rem_minmax(0,1fr)_12rem]"
          >
            <time dateTime={entry.at} className="text-ink-3">
              {formatDate(entry.at)}, {formatTime(entry.at)}
            </time>
            <span className="min-w-0 break-words">
              {entry.text}
              {entry.detail ? <span className="block text-xs text-ink-3">{entry.detail}</span> : null}
            </span>
            <span className="text-xs text-ink-3">{BY[entry.by]}</span>
          </li>
        ))}
      </ul>
      <p className="mt-2 text-xs text-ink-3">Times are UTC.</p>
    </section>
  );
}

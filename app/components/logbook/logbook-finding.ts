import { formatDate, plural, pluralWord } from "~/lib/format";
import type { LogbookRow } from "~/lib/views";
import { joinWords } from "~/lib/workbench/findings";

/** How many entries there are, since when, and by whom. */
export function logbookFinding(rows: readonly LogbookRow[], older: number | null, hidden: boolean): string {
  const first = rows.at(-1);
  if (first === undefined) return hidden ? "No entry fits these filters." : "Nothing was decided yet.";
  const different = (by: LogbookRow["by"]) =>
    new Set(rows.filter((row) => row.by === by).map(({ who }) => who)).size;
  const by = [
    different("person") > 0 ? pluralWord(different("person"), "person", "people") : null,
    different("token") > 0 ? pluralWord(different("token"), "token") : null,
    different("link") > 0 ? pluralWord(different("link"), "link") : null,
  ].filter((part) => part !== null);
  const count = plural(rows.length, "entry", "entries");
  const which = hidden ? `${count} that fit` : older === null ? count : `The newest ${count}`;
  return `${which} since ${formatDate(first.at)}${by.length > 0 ? `, by ${joinWords(by)}` : ""}.`;
}

import { capital, formatDate, plural, pluralWord } from "../format.ts";
import type { Finding } from "../workbench/findings.ts";
import type { HandOverView } from "./views.ts";

/**
 * What the Hand-over section says first: whether the newest edition recomputes, what came in since, and which links live.
 *
 * @param conformers of the distinct set shown; null where there is none
 */
export function handOverFinding(view: HandOverView, conformers: number | null): Finding {
  const last = view.editions[0];
  if (last === undefined) {
    const set = conformers === null ? "Nothing" : plural(conformers, "distinct conformer");
    return {
      text: view.mayShare
        ? `${set} can be frozen: an edition keeps them, with their recipe, as they are now.`
        : `${set}, as files that the next program opens, with the recipe that made them.`,
      second: view.mayShare
        ? "Nobody can change an edition afterwards; links show it to people without an account."
        : null,
    };
  }
  const state =
    last.verified === null
      ? `Edition ${last.number} is frozen, and not yet recomputed.`
      : last.verified.same
        ? `Edition ${last.number} recomputes to the same bytes.`
        : `Edition ${last.number} does not recompute to the same bytes.`;
  const changed = view.next?.changed ?? [];
  const since =
    changed.length === 0 || changed.join() === "nothing changed"
      ? "Nothing changed since it was frozen."
      : `Since it was frozen: ${changed.join("; ")}.`;
  return { text: `${state} ${since}`, second: linksSentence(view) };
}

function linksSentence({ links }: HandOverView): string | null {
  const live = links.filter(({ state }) => state === "live");
  const next = live.reduce<(typeof live)[number] | null>(
    (first, link) => (first === null || link.endsAt < first.endsAt ? link : first),
    null,
  );
  if (next === null) return null;
  const count = `${capital(pluralWord(live.length, "link"))} ${live.length === 1 ? "is" : "are"} live.`;
  return `${count} The ${live.length === 1 ? "one" : "next to end"} for ${next.label} ends on ${formatDate(next.endsAt)}.`;
}

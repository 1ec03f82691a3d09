import { LOGBOOK_KINDS, type LogbookKind } from "./kinds.ts";

/** What of a logbook is shown; as it stands in the address. */
export interface LogbookFilter {
  kind: LogbookKind | "all" | "no-sign-ins";
  /** Id of a person, or "token", "link", "product", "all". */
  who: string;
  when: "all" | "today" | "week" | "month";
  /** Words that an entry must hold. */
  text: string;
  /** Number of the last entry seen. */
  before: number | null;
}

export const NO_FILTER: LogbookFilter = { kind: "all", who: "all", when: "all", text: "", before: null };

/**
 * Reads the filter from an address; what cannot be read hides nothing.
 *
 * @example readFilter(new URLSearchParams("kind=link&text=partner")).kind // "link"
 */
export function readFilter(params: URLSearchParams): LogbookFilter {
  const kind = params.get("kind") ?? "all";
  const who = params.get("who") ?? "all";
  const when = params.get("when") ?? "all";
  const before = params.get("before") ?? "";
  return {
    kind: kind === "no-sign-ins" ? kind : (LOGBOOK_KINDS.find((one) => one === kind) ?? "all"),
    who: /^([a-z2-7]{16}|token|link|product)$/.test(who) ? who : "all",
    when: when === "today" || when === "week" || when === "month" ? when : "all",
    text: (params.get("text") ?? "").trim().slice(0, 100),
    before: /^[1-9]\d{0,14}$/.test(before) ? Number(before) : null,
  };
}

/** True where something is hidden. */
export function hidesSomething({ kind, who, when, text }: LogbookFilter): boolean {
  return kind !== "all" || who !== "all" || when !== "all" || text !== "";
}

const DAY_MS = 86_400_000;

/** The first moment that is shown; null shows all. Days are UTC days. */
export function shownSince(when: LogbookFilter["when"], now: Date): Date | null {
  const today = Math.floor(now.getTime() / DAY_MS) * DAY_MS;
  const days = { all: null, today: 0, week: 6, month: 29 }[when];
  return days === null ? null : new Date(today - days * DAY_MS);
}

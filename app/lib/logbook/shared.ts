import { plural } from "../format.ts";
import { framesWords } from "../workbench/intake-lists.ts";
import { describeEntry, type LogbookEntry, type LogbookType } from "./entries.ts";

/** An entry as a guest of an edition reads it. */
type Words = { text: string; detail: string | null };
type Of<T extends LogbookType> = Extract<LogbookEntry, { type: T }>;

/**
 * What a guest is told of a kind: nothing, what members read, "its own" of the edition that the link shows alone, or
 * words of its own, where those of members name something else of the team's.
 */
type Decision<T extends LogbookType> = "nothing" | "all" | "its own" | ((data: Of<T>["data"]) => Words);

/**
 * The edition's part of the logbook, decided kind by kind: a new kind does not compile until it stands here. Told is what
 * made the numbers of the edition; nothing is told of people, access, tokens, links, exports, other ensembles and other
 * editions. Remarks are said among the team, names and folders are its own order, plans and pair distances are no part
 * of an edition.
 */
const TOLD: { [T in LogbookType]: Decision<T> } = {
  "sign-up": "nothing",
  "sign-in": "nothing",
  "sign-in-failed": "nothing",
  "sign-out": "nothing",
  "password-reset-asked": "nothing",
  "password-changed": "nothing",
  "team-made": "nothing",
  "team-renamed": "nothing",
  "team-deleted": "nothing",
  "team-restored": "nothing",
  "link-days-set": "nothing",
  invited: "nothing",
  "invitation-withdrawn": "nothing",
  joined: "nothing",
  "role-changed": "nothing",
  "person-removed": "nothing",
  "person-left": "nothing",
  "sessions-ended": "nothing",
  "address-change-asked": "nothing",
  "address-changed": "nothing",
  "address-confirmed": "nothing",
  "account-deleted": "nothing",
  "account-restored": "nothing",
  "token-made": "nothing",
  "token-revoked": "nothing",
  "series-made": "nothing",
  intake: "all",
  batch: "all",
  reread: "all",
  answer: "all",
  hold: "all",
  release: "all",
  "release-refused": "all",
  // The other ensemble is no part of the edition: its name stays out.
  "split-off": ({ count, frames }) => ({
    text: `Made another ensemble of ${plural(count, "held frame")}`,
    detail: framesWords(frames),
  }),
  "split-from": ({ count }) => ({
    text: `Made of ${plural(count, "held frame")} of another ensemble`,
    detail: null,
  }),
  sift: "all",
  "sift-cancelled": "nothing",
  export: "nothing",
  "source-downloaded": "nothing",
  "columns-added": "all",
  "column-changed": "all",
  "column-removed": "all",
  "column-restored": "all",
  "atoms-split": "all",
  "atoms-joined": "all",
  "measured-kept": "all",
  "plan-saved": "nothing",
  "plan-removed": "nothing",
  "plan-restored": "nothing",
  "edition-frozen": "its own",
  // The page says how the last recomputation came out.
  "edition-verified": "nothing",
  "edition-exported": "nothing",
  "link-made": "nothing",
  "link-opened": "nothing",
  "link-exported": "nothing",
  "link-ended": "nothing",
  remark: "nothing",
  renamed: "nothing",
  moved: "nothing",
  deleted: "nothing",
  restored: "nothing",
  "outside-added": "all",
  "outside-removed": "all",
  "outside-restored": "all",
  "pair-matrix": "nothing",
};

const KINDS = Object.keys(TOLD) as LogbookType[];

/** Kinds of which a guest is told what happened before the edition was frozen. */
export const SHARED_KINDS: readonly LogbookType[] = KINDS.filter(
  (kind) => TOLD[kind] !== "nothing" && TOLD[kind] !== "its own",
);

/** Kinds that are told of the edition itself alone. */
export const OWN_KINDS: readonly LogbookType[] = KINDS.filter((kind) => TOLD[kind] === "its own");

/**
 * An entry in the words that a guest reads; null where a guest is told nothing of its kind.
 *
 * @example describeShared({ type: "remark", data: { text: "call them" } }) // null
 */
export function describeShared(entry: LogbookEntry): Words | null {
  // The table has, for each kind, words that take the data of that very kind.
  const told = TOLD[entry.type] as Decision<LogbookType>;
  if (told === "nothing") return null;
  return typeof told === "function" ? told(entry.data as never) : describeEntry(entry);
}

import type { LogbookType } from "./entries.ts";

/** What an entry is about, as the filter and the badge of a row name it. */
export const LOGBOOK_KINDS = [
  "intake",
  "answer",
  "held",
  "recipe",
  "column",
  "edition",
  "link",
  "export",
  "remark",
  "ensemble",
  "people",
  "token",
  "sign-in",
] as const;
export type LogbookKind = (typeof LOGBOOK_KINDS)[number];

const STARTS: readonly [RegExp, LogbookKind][] = [
  [/^sign-|^password-|^sessions-/, "sign-in"],
  [/^token-/, "token"],
  [/^team-|^link-days|^invit|^joined|^role-|^person-|^address-|^account-/, "people"],
  [/^link-exported$|^edition-exported$|^export$|^source-downloaded$/, "export"],
  [/^link-/, "link"],
  [/^edition-/, "edition"],
  [/^intake$|^batch$|^split-|^reread$/, "intake"],
  [/^answer$/, "answer"],
  [/^hold$|^release/, "held"],
  [/^column|^atoms-|^measured-/, "column"],
  [/^remark$/, "remark"],
  [/^series-|^renamed$|^moved$|^deleted$|^restored$/, "ensemble"],
];

/**
 * The kind of an entry; what computes is "recipe".
 *
 * @example kindOf("edition-frozen") // "edition"
 */
export function kindOf(type: string): LogbookKind {
  return STARTS.find(([start]) => start.test(type))?.[1] ?? "recipe";
}

/** The entry types of some kinds, of all that there are. */
export function typesOf(kinds: readonly LogbookKind[], all: readonly LogbookType[]): LogbookType[] {
  return all.filter((type) => kinds.includes(kindOf(type)));
}

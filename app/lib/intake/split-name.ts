import type { HoldReason } from "./report.ts";

/** Frames held for one of these are sound structures of something else. */
const SPLIT_REASONS: readonly HoldReason[] = ["other-species", "other-composition", "other-configuration"];

/** Whether frames held for this reason can become an ensemble of their own. */
export function canBeSplitOff(reason: string | null): boolean {
  return SPLIT_REASONS.includes(reason as HoldReason);
}

const MOST_CHARACTERS = 200;

/**
 * In what held frames differ, as their hold says it, in few words: what the ensemble itself is needs no saying.
 *
 * @example splitWords("Another composition: C4H10, where the ensemble is C2H4F2.") // "C4H10"
 */
export function splitWords(note: string | null): string {
  const sentence = (note ?? "").split(/\.(?:\s|$)/)[0]?.trim() ?? "";
  const change = sentence
    .replace(/^Another (?:species|molecule|configuration|composition)\s*/i, "")
    .replace(/, where the ensemble (?:is|has) .*$/, "")
    .replace(/^Another /, "")
    .replace(/^\(([^()]*)\)\s*/, "$1")
    .replace(/^[:,;]\s*/, "");
  return change === "" ? "held frames" : change;
}

/**
 * Name of the ensemble that held frames make: the parent's, and in what they differ.
 *
 * @example splitName("Night run", "Another species (proton transfer): H14 has moved from N4 to O8.")
 * // "Night run, proton transfer: H14 has moved from N4 to O8"
 */
export function splitName(parent: string, note: string | null): string {
  const words = splitWords(note);
  const room = MOST_CHARACTERS - 2 - [...words].length;
  const name = room >= 20 ? `${[...parent].slice(0, room).join("")}, ${words}` : `${parent}, ${words}`;
  return [...name].slice(0, MOST_CHARACTERS).join("");
}

import type { HoldReason } from "./report.ts";

/** Why a person cannot release a frame, or several; null where a person may. The one place that decides. */
const WHY_NOT: Record<HoldReason, readonly [one: string, several: string] | null> = {
  "waits-for-answer": null,
  "far-off": null,
  "by-hand": null,
  unreadable: [
    "it is broken or incomplete. Repair the file and take it in again.",
    "they are broken or incomplete. Repair the file and take it in again.",
  ],
  "other-composition": [
    "it is another molecule. It can become an ensemble of its own.",
    "they are another molecule. They can become an ensemble of their own.",
  ],
  "other-order": [
    "its atoms stand in another order than the rest. Write the file with one atom order.",
    "their atoms stand in another order than the rest. Write the file with one atom order.",
  ],
  "other-species": [
    "its bonds differ from the rest: it is another species. It can become an ensemble of its own.",
    "their bonds differ from the rest: they are another species. They can become an ensemble of their own.",
  ],
  "other-configuration": [
    "it is another configuration. It can become an ensemble of its own.",
    "they are another configuration. They can become an ensemble of their own.",
  ],
  unclear: [
    "the file leaves open how it is to be read. Write it so that it does not, and take it in again.",
    "the file leaves open how they are to be read. Write it so that it does not, and take it in again.",
  ],
};

function isHoldReason(reason: string | null): reason is HoldReason {
  return reason !== null && Object.hasOwn(WHY_NOT, reason);
}

/**
 * What stands against releasing a held frame, or `count` of them, as the end of a sentence; null where nothing does.
 *
 * @example whyNotReleased("by-hand") // null
 */
export function whyNotReleased(reason: string | null, count = 1): string | null {
  const words = isHoldReason(reason) ? WHY_NOT[reason] : WHY_NOT.unclear;
  return words === null ? null : words[count === 1 ? 0 : 1];
}

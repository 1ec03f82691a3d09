import { formatCount } from "../format.ts";
import type { HoldReason } from "../intake/report.ts";
import type { FrameView } from "../views.ts";

/** Reasons as badges. */
const REASON_WORDS: Record<HoldReason, string> = {
  unreadable: "Unreadable",
  "other-composition": "Another molecule",
  "other-order": "Another atom order",
  "other-species": "Another species",
  "other-configuration": "Another configuration",
  "waits-for-answer": "Waits for an answer",
  unclear: "Unclear",
  "far-off": "Energy far off",
  "by-hand": "Held by hand",
};

export function reasonWords(reason: string | null): string {
  return REASON_WORDS[reason as HoldReason] ?? "Held";
}

/** Frames that share their reason and its words. */
export interface FrameGroup {
  frames: FrameView[];
  first: FrameView;
}

/**
 * Frames of one state, those with the same reason and the same words together, in the order of their first frame.
 * Frames that a person may release stay single, since each is decided for itself.
 */
export function groupFrames(frames: readonly FrameView[]): FrameGroup[] {
  const groups = new Map<string, FrameGroup>();
  for (const frame of frames) {
    const single = frame.releasable && frame.holdReason !== "waits-for-answer";
    const key = single ? `#${frame.number}` : `${frame.holdReason ?? ""}\n${frame.note ?? ""}`;
    const group = groups.get(key);
    if (group) group.frames.push(frame);
    else groups.set(key, { frames: [frame], first: frame });
  }
  return [...groups.values()];
}

const NAMED = 6;

/**
 * The frames of a group in words: runs are drawn together, and of many the first are named.
 *
 * @example framesWords([1, 2, 3, 7]) // "Frames 1 to 3, 7"
 */
export function framesWords(numbers: readonly number[]): string {
  if (numbers.length === 1) return `Frame ${formatCount(numbers[0])}`;
  const runs: [number, number][] = [];
  for (const number of [...numbers].sort((a, b) => a - b)) {
    const last = runs.at(-1);
    if (last && number === last[1] + 1) last[1] = number;
    else runs.push([number, number]);
  }
  const words = runs
    .slice(0, NAMED)
    .map(([from, to]) =>
      from === to
        ? formatCount(from)
        : to === from + 1
          ? `${formatCount(from)}, ${formatCount(to)}`
          : `${formatCount(from)} to ${formatCount(to)}`,
    );
  const rest = runs.slice(NAMED).reduce((sum, [from, to]) => sum + to - from + 1, 0);
  return `Frames ${words.join(", ")}${rest > 0 ? ` and ${formatCount(rest)} more` : ""}`;
}

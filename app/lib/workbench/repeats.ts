import type { DroppedFrame, SiftResult } from "../recipe/result.ts";

/** Frames left out, by the kept frame that they repeat, each list in file order. */
export function repeatsOf(result: SiftResult): Map<number, DroppedFrame[]> {
  const lists = new Map<number, DroppedFrame[]>();
  for (const frame of result.dropped) {
    const list = lists.get(frame.repeats);
    if (list) list.push(frame);
    else lists.set(frame.repeats, [frame]);
  }
  for (const list of lists.values()) list.sort((a, b) => a.frame - b.frame);
  return lists;
}

import { MAX_SELECTED } from "../url-state.ts";

/**
 * Selection after a click on a row.
 *
 * A plain click selects the row alone, or nothing when it was the only one; with `add` it joins or leaves; with
 * `extend` the rows from the first chosen one to this are selected, in the order of the table.
 *
 * @param order frame numbers as the table shows them
 */
export function clickSelection(
  selected: readonly number[],
  frame: number,
  order: readonly number[],
  how: "only" | "add" | "extend",
): number[] {
  if (how === "add") {
    return selected.includes(frame) ? selected.filter((other) => other !== frame) : cut([...selected, frame]);
  }
  if (how === "extend") {
    // The first one chosen stays the anchor, and the one that distances are measured from.
    const anchor = selected.find((other) => order.includes(other));
    if (anchor === undefined) return [frame];
    const from = order.indexOf(anchor);
    const to = order.indexOf(frame);
    return cut(from <= to ? order.slice(from, to + 1) : order.slice(to, from + 1).reverse());
  }
  return selected.length === 1 && selected[0] === frame ? [] : [frame];
}

function cut(frames: number[]): number[] {
  return frames.slice(0, MAX_SELECTED);
}

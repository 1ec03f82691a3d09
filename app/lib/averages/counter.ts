/** Fewer values that count up by one may do so by chance. */
const FEWEST = 3;

/**
 * Whether a column counts up by one frame by frame: a label that somebody numbered frames with, not a property. Missing
 * frames may lie between; a set that was sifted has most of them left out.
 *
 * @param frames numbers of the frames, any order, each once
 * @param values one a frame, null where missing
 * @example countsUp([4, 1, 9], [3, 0, 8]) // true
 */
export function countsUp(frames: readonly number[], values: readonly (number | null)[]): boolean {
  let offset: number | null = null;
  let seen = 0;
  for (const [k, value] of values.entries()) {
    const frame = frames[k];
    if (value === null || frame === undefined) continue;
    if (!Number.isInteger(value)) return false;
    offset ??= value - frame;
    if (value - frame !== offset) return false;
    seen += 1;
  }
  return seen >= FEWEST;
}

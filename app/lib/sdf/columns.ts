/** Fixed columns of V2000 lines: read by place, never by blanks (row S01). */

/**
 * The whole number in columns `from` up to, not including, `to` (from 0), right- or left-aligned.
 *
 * @returns 0 where the columns are blank or beyond the line's end, null where they hold anything else
 * @example intColumns("130135", 3, 6) // 135
 */
export function intColumns(text: string, from: number, to: number): number | null {
  const piece = text.slice(from, to).replace(/^ +| +$/g, "");
  if (piece === "") return 0;
  return /^[+-]?\d+$/.test(piece) ? Number(piece) : null;
}

/** As `intColumns`, but null too where the columns are blank. */
export function neededColumns(text: string, from: number, to: number): number | null {
  return /\d/.test(text.slice(from, to)) ? intColumns(text, from, to) : null;
}

/** The text in columns `from` up to, not including, `to` (from 0), without blanks round it. */
export function textColumns(text: string, from: number, to: number): string {
  return text.slice(from, to).replace(/^ +| +$/g, "");
}

import { LARGEST_NUMBER } from "./numbers.ts";

/** A decimal number that is all of a comment line. */
export interface BareDecimal {
  readonly text: string;
  readonly value: number;
  /** Digits behind the point. */
  readonly decimals: number;
}

const BLANK = 32;
const POINT = 46;
const MINUS = 45;

/**
 * The number of a comment that holds one plain decimal (`-83.4944880275`, blanks round it) and nothing else; null for
 * anything that needs a closer look.
 *
 * @example bareDecimal("   -1.50 ") // { text: "-1.50", value: -1.5, decimals: 2 }
 */
export function bareDecimal(comment: string): BareDecimal | null {
  let from = 0;
  let to = comment.length;
  while (from < to && comment.charCodeAt(from) === BLANK) from += 1;
  while (to > from && comment.charCodeAt(to - 1) === BLANK) to -= 1;
  const first = from + Number(comment.charCodeAt(from) === MINUS);
  let point = -1;
  for (let k = first; k < to; k++) {
    const c = comment.charCodeAt(k);
    if (c === POINT && point < 0) point = k;
    else if (c < 48 || c > 57) return null;
  }
  // Digits on both sides; other forms are for the reader of words to judge.
  if (point <= first || point === to - 1) return null;
  const text = comment.slice(from, to);
  const value = Number(text);
  return Math.abs(value) <= LARGEST_NUMBER ? { text, value, decimals: to - point - 1 } : null;
}

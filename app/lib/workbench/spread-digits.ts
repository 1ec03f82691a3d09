/** So many figures fit into the column. */
const FIGURES = 8;
const MOST_DIGITS = 5;

/**
 * Decimals for spreads that stand in one column, as their files write the numbers: those that tell the smallest from
 * nothing (hartrees need more than kilocalories), for all of them alike.
 *
 * @param spreads absent ones are null
 * @returns 0 where all are whole; else 2 to 5, fewer where the largest would not fit
 * @example spreadDigits([3, 0.3]) // 3: "3.000" and "0.300"
 */
export function spreadDigits(spreads: readonly (number | null)[]): number {
  const sizes = spreads.filter((spread) => spread !== null && spread > 0) as number[];
  if (sizes.every(Number.isInteger)) return 0;
  const wanted = 2 - Math.floor(Math.log10(Math.min(...sizes)));
  const whole = Math.max(1, Math.floor(Math.log10(Math.max(...sizes))) + 1);
  return Math.max(0, Math.min(Math.max(2, wanted), MOST_DIGITS, FIGURES - whole));
}

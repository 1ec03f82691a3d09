/**
 * Sum of the values by Neumaier's compensated summation (Z. Angew. Math. Mech. 1974, 54, 39; from memory): the order of
 * the list hardly matters to the last digit.
 *
 * @returns 0 for an empty list; NaN where a value is NaN
 * @example sum([1, 1e100, 1, -1e100]) // 2
 */
export function sum(values: ArrayLike<number>): number {
  let total = 0;
  let lost = 0;
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    const next = total + value;
    lost += Math.abs(total) >= Math.abs(value) ? total - next + value : value - next + total;
    total = next;
  }
  return total + lost;
}

/**
 * Arithmetic mean.
 *
 * @returns NaN for an empty list
 * @example mean([1, 2, 6]) // 3
 */
export function mean(values: ArrayLike<number>): number {
  return sum(values) / values.length;
}

/**
 * Mean of the absolute values.
 *
 * @example meanAbsolute([-1, 3]) // 2
 */
export function meanAbsolute(values: ArrayLike<number>): number {
  return sum(Float64Array.from(values, Math.abs)) / values.length;
}

/**
 * Root of the mean square, divided by n.
 *
 * @example rootMeanSquare([3, 4]) // 3.5355
 */
export function rootMeanSquare(values: ArrayLike<number>): number {
  return Math.sqrt(sum(Float64Array.from(values, (v) => v * v)) / values.length);
}

/**
 * Standard deviation of a sample: squares about the mean, divided by n - 1.
 *
 * @returns null for fewer than two values
 * @example sampleSd([1, 2, 3]) // 1
 */
export function sampleSd(values: ArrayLike<number>): number | null {
  if (values.length < 2) return null;
  const centre = mean(values);
  // Filled by hand: draws ask for this of thousands of lists, and `from` with a function takes ten times as long.
  const squares = new Float64Array(values.length);
  for (let i = 0; i < values.length; i++) {
    const off = values[i]! - centre;
    squares[i] = off * off;
  }
  return Math.sqrt(sum(squares) / (values.length - 1));
}

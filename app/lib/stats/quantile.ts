/**
 * Quantile of values that already rise, by linear interpolation between neighbours (place (n - 1) p; the common
 * default of numerical libraries, type 7 of Hyndman and Fan, Am. Stat. 1996, 50, 361; from memory).
 *
 * @param share 0 to 1
 * @throws RangeError on an empty list or a share outside 0 to 1
 * @example quantileOfSorted([1, 2, 3, 4], 0.5) // 2.5
 */
export function quantileOfSorted(sorted: ArrayLike<number>, share: number): number {
  if (sorted.length === 0) throw new RangeError("No value to take a quantile of.");
  if (!(share >= 0 && share <= 1)) throw new RangeError(`A share lies between 0 and 1, found ${share}.`);
  const place = (sorted.length - 1) * share;
  const below = Math.floor(place);
  const low = sorted[below]!;
  const high = sorted[Math.min(below + 1, sorted.length - 1)]!;
  return low + (place - below) * (high - low);
}

/** The same of values in any order; the list is left as it is. */
export function quantile(values: ArrayLike<number>, share: number): number {
  return quantileOfSorted(Float64Array.from(values).sort(), share);
}

/**
 * Median: the mean of the two middle values where their number is even.
 *
 * @example median([5, 1, 3]) // 3
 */
export function median(values: ArrayLike<number>): number {
  return quantile(values, 0.5);
}

/** Places of the values in rising order; equal values in the order given. */
export function risingOrder(values: ArrayLike<number>): number[] {
  return Array.from({ length: values.length }, (_, i) => i).sort((a, b) => values[a]! - values[b]! || a - b);
}

/**
 * Ranks from 1 in rising order; equal values share the mean of their ranks.
 *
 * @example midRanks([12, 2, 1, 12, 2]) // 4.5, 2.5, 1, 4.5, 2.5
 */
export function midRanks(values: ArrayLike<number>): Float64Array {
  const order = risingOrder(values);
  const ranks = new Float64Array(values.length);
  let from = 0;
  while (from < order.length) {
    let to = from + 1;
    while (to < order.length && values[order[to]!] === values[order[from]!]) to++;
    for (let k = from; k < to; k++) ranks[order[k]!] = (from + 1 + to) / 2;
    from = to;
  }
  return ranks;
}

/**
 * Ranks from 1 as a person counts them: equal values share the lowest of their ranks (1, 2, 2, 4).
 *
 * @example placeRanks([0.5, 0, 0.5, 2]) // 2, 1, 2, 4
 */
export function placeRanks(values: ArrayLike<number>): Int32Array {
  const order = risingOrder(values);
  const ranks = new Int32Array(values.length);
  for (let k = 0; k < order.length; k++) {
    const tied = k > 0 && values[order[k]!] === values[order[k - 1]!];
    ranks[order[k]!] = tied ? ranks[order[k - 1]!]! : k + 1;
  }
  return ranks;
}

/** How far two populations p and q of the same conformers agree. */

/**
 * Shared population: sum min(p, q), which is 1 less the total variation distance.
 *
 * @param p, q fractions that sum to 1
 * @example populationOverlap([0.5, 0.5], [1, 0]) // 0.5
 */
export function populationOverlap(p: ArrayLike<number>, q: ArrayLike<number>): number {
  let shared = 0;
  for (let i = 0; i < p.length; i++) shared += Math.min(p[i]!, q[i]!);
  return Math.min(1, shared);
}

/**
 * Kullback-Leibler divergence sum p ln(p/q), nats; 0 ln 0 is 0.
 *
 * @returns Infinity where q is 0 and p is not
 * @example klDivergence([1, 0], [0.5, 0.5]) // 0.693
 */
export function klDivergence(p: ArrayLike<number>, q: ArrayLike<number>): number {
  let total = 0;
  for (let i = 0; i < p.length; i++) {
    if (p[i]! > 0) total += q[i]! > 0 ? p[i]! * Math.log(p[i]! / q[i]!) : Number.POSITIVE_INFINITY;
  }
  return Math.max(0, total);
}

/**
 * Jensen-Shannon divergence H((p + q)/2) - (H(p) + H(q))/2 in bits, 0 (equal) to 1 (nothing shared); its root is a
 * distance (Lin, IEEE Trans. Inf. Theory 1991, 37, 145; Endres, Schindelin, ibid. 2003, 49, 1858).
 *
 * @example jensenShannonBits([1, 0], [0, 1]) // 1
 */
export function jensenShannonBits(p: ArrayLike<number>, q: ArrayLike<number>): number {
  const middle = Float64Array.from(p, (value, i) => (value + q[i]!) / 2);
  const nats = (klDivergence(p, middle) + klDivergence(q, middle)) / 2;
  return Math.min(1, nats / Math.LN2);
}

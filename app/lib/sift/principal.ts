const ROUNDS = 4;

/**
 * Orthonormal directions along which sets of numbers differ most: principal axes by repeated multiplication, each at
 * right angles to those before. They need not be exact, as any orthonormal directions give valid bounds; the same
 * input gives the same digits.
 *
 * @param sets packed, `count` sets of `n` numbers each, every one at `stride` * k + `offset`
 * @param wanted directions, at most n
 * @returns rows of n numbers
 * @example principalDirections(Float64Array.of(0, 0, 5, 0), 2, 2, 2, 0, 1) // 1, 0 (or -1, 0)
 */
export function principalDirections(
  sets: Float64Array,
  count: number,
  n: number,
  stride: number,
  offset: number,
  wanted: number,
): Float64Array {
  const mean = new Float64Array(n);
  for (let s = 0; s < count; s++)
    for (let k = 0; k < n; k++) mean[k]! += sets[s * stride + offset + k]! / count;
  const rows = Math.min(wanted, n);
  const directions = new Float64Array(rows * n);
  const next = new Float64Array(n);
  for (let d = 0; d < rows; d++) {
    const v = startOf(directions, d, n);
    for (let round = 0; round < ROUNDS; round++) {
      next.fill(0);
      for (let s = 0; s < count; s++) {
        const from = s * stride + offset;
        let along = 0;
        for (let k = 0; k < n; k++) along += v[k]! * (sets[from + k]! - mean[k]!);
        for (let k = 0; k < n; k++) next[k]! += along * (sets[from + k]! - mean[k]!);
      }
      if (!clear(next, directions, d, n)) break;
      v.set(next);
    }
    directions.set(v, d * n);
  }
  return directions;
}

/** Any direction at right angles to the first `d`. */
function startOf(directions: Float64Array, d: number, n: number): Float64Array {
  const v = Float64Array.from({ length: n }, (_, k) => 1 + ((7 * k + 3 * d) % 11) / 11);
  for (let k = 0; !clear(v, directions, d, n); k++) {
    v.fill(0);
    v[k] = 1;
  }
  return v;
}

/** Takes out what lies along the first `d` directions and brings the rest to length 1; false where nothing is left. */
function clear(v: Float64Array, directions: Float64Array, d: number, n: number): boolean {
  if (scale(v) === 0) return false;
  // Twice, as once leaves the rounding of what was taken out.
  for (let pass = 0; pass < 2; pass++) {
    for (let e = 0; e < d; e++) {
      let along = 0;
      for (let k = 0; k < n; k++) along += v[k]! * directions[e * n + k]!;
      for (let k = 0; k < n; k++) v[k]! -= along * directions[e * n + k]!;
    }
    if (scale(v) < 1e-6) return false;
  }
  return true;
}

/** Brings v to length 1; returns its length before. */
function scale(v: Float64Array): number {
  let square = 0;
  for (let k = 0; k < v.length; k++) square += v[k]! * v[k]!;
  const length = Math.sqrt(square);
  if (length > 0) for (let k = 0; k < v.length; k++) v[k]! /= length;
  return length;
}

import { centreInto } from "./kernel.ts";
import type { SymmetryPlan } from "./plan.ts";

/** What comparisons read of one frame, in flat arrays, and the bounds that need nothing else. */

/**
 * Writes what comparisons read of one frame, `plan.shapeLength` numbers: centred coordinates (3 n); E, their sum of
 * squares; distances from the centroid, ascending within each root cell (n); for each cell the sum of its positions
 * and the norm of their deviations from its own centre (4 each).
 *
 * @param positions packed coordinates of all atoms in Å; `from` is where the frame begins
 */
export function writeShape(
  plan: SymmetryPlan,
  positions: Float64Array,
  from: number,
  shape: Float64Array,
  at: number,
): void {
  const n = plan.n;
  if (n === 0) {
    shape[at] = 0;
    return;
  }
  shape[at + 3 * n] = centreInto(positions, from, plan.atoms, shape, at);
  writeDistances(plan, shape, at);
  const cells = plan.cellStarts.length - 1;
  for (let c = 0; c < cells; c++) writeCell(plan, c, shape, at);
}

function writeDistances(plan: SymmetryPlan, shape: Float64Array, at: number): void {
  let next = at + 3 * plan.n + 1;
  for (const k of plan.rootSingles) shape[next++] = Math.sqrt(squareOf(shape, at + 3 * k));
  for (const c of plan.rootCells) {
    const first = next;
    for (let j = plan.cellStarts[c]!; j < plan.cellStarts[c + 1]!; j++) {
      shape[next++] = Math.sqrt(squareOf(shape, at + 3 * plan.cellAtoms[j]!));
    }
    sortRange(shape, first, next);
  }
}

/** Sorts a short run of numbers in place; orbits are small, and a call of the library's sort costs more than they. */
function sortRange(numbers: Float64Array, from: number, to: number): void {
  if (to - from > 32) {
    numbers.subarray(from, to).sort();
    return;
  }
  for (let k = from + 1; k < to; k++) {
    const value = numbers[k]!;
    let at = k;
    while (at > from && numbers[at - 1]! > value) {
      numbers[at] = numbers[at - 1]!;
      at -= 1;
    }
    numbers[at] = value;
  }
}

function squareOf(shape: Float64Array, i: number): number {
  return shape[i]! * shape[i]! + shape[i + 1]! * shape[i + 1]! + shape[i + 2]! * shape[i + 2]!;
}

function writeCell(plan: SymmetryPlan, c: number, shape: Float64Array, at: number): void {
  const from = plan.cellStarts[c]!;
  const to = plan.cellStarts[c + 1]!;
  let sx = 0;
  let sy = 0;
  let sz = 0;
  for (let j = from; j < to; j++) {
    const i = at + 3 * plan.cellAtoms[j]!;
    sx += shape[i]!;
    sy += shape[i + 1]!;
    sz += shape[i + 2]!;
  }
  const count = to - from;
  let deviation = 0;
  for (let j = from; j < to; j++) {
    const i = at + 3 * plan.cellAtoms[j]!;
    const dx = shape[i]! - sx / count;
    const dy = shape[i + 1]! - sy / count;
    const dz = shape[i + 2]! - sz / count;
    deviation += dx * dx + dy * dy + dz * dz;
  }
  const t = at + 4 * plan.n + 1 + 4 * c;
  shape[t] = sx;
  shape[t + 1] = sy;
  shape[t + 2] = sz;
  shape[t + 3] = Math.sqrt(deviation);
}

/**
 * True when the distances from the centroid alone put the RMSD of two shapes above the tolerance, whatever the
 * rotation, reflection and exchange: n RMSD^2 >= sum (d_x - d_y)^2 with distances sorted inside every orbit.
 */
export function distancesExceed(
  plan: SymmetryPlan,
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  tolerance: number,
): boolean {
  const n = plan.n;
  const limit = squareLimit(n, tolerance);
  return gap(x, xo + 3 * n + 1, y, yo + 3 * n + 1, n, limit) > limit;
}

/** Numbers of a profile: the norm of a shape and its sorted distances, packed for long runs of comparisons. */
export function profileLength(plan: SymmetryPlan): number {
  return plan.n + 1;
}

/** Copies the profile of a shape to `profile` at `to`. */
export function writeProfile(
  plan: SymmetryPlan,
  shape: Float64Array,
  at: number,
  profile: Float64Array,
  to: number,
): void {
  const n = plan.n;
  profile[to] = Math.sqrt(shape[at + 3 * n]!);
  for (let k = 1; k <= n; k++) profile[to + k] = shape[at + 3 * n + k]!;
}

/**
 * `distancesExceed` on profiles, after the cheaper bound sqrt(n) RMSD >= | |x| - |y| |.
 *
 * @param limit from `squareLimit`
 */
export function profilesExceed(
  n: number,
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  limit: number,
): boolean {
  return profileGap(n, x, xo, y, yo, limit) > limit;
}

/** The bound behind `profilesExceed`: at most n RMSD^2; above the limit any number above it. */
export function profileGap(
  n: number,
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  limit: number,
): number {
  const d = x[xo]! - y[yo]!;
  return d * d > limit ? d * d : gap(x, xo + 1, y, yo + 1, n, limit);
}

/** n tolerance^2, raised so that rounding never rejects a pair that lies within. */
export function squareLimit(n: number, tolerance: number): number {
  return n * tolerance * tolerance * (1 + 1e-9) + 1e-18;
}

function gap(x: Float64Array, i: number, y: Float64Array, j: number, n: number, limit: number): number {
  let sum = 0;
  for (let k = 0; k < n; k++) {
    const d = x[i + k]! - y[j + k]!;
    sum += d * d;
    if (sum > limit) return sum;
  }
  return sum;
}

import type { StabiliserChain } from "../../app/lib/chem/automorphisms.ts";

/**
 * A straightforward RMSD to hold the product's against: Kabsch by singular values (Acta Cryst. A 1976, 32, 922;
 * 1978, 34, 827) and brute force over all mappings. Written for clarity; shares no code with the product.
 */

export type Points = readonly (readonly number[])[];

/** Unpacks chosen atoms of a frame. */
export function pointsOf(
  positions: Float64Array,
  frame: number,
  atomsOfFrame: number,
  atoms: ArrayLike<number>,
): number[][] {
  return Array.from(atoms, (a) => {
    const i = 3 * (frame * atomsOfFrame + a);
    return [positions[i]!, positions[i + 1]!, positions[i + 2]!];
  });
}

export const pack = (points: Points): Float64Array => Float64Array.from(points.flat());
export const mirrored = (points: Points): number[][] => points.map((p) => p.map((v) => -v));

/** RMSD after the best proper rotation, equal or given weights. */
export function kabschRmsd(x: Points, y: Points, weights?: readonly number[]): number {
  const w = weights ?? x.map(() => 1);
  const total = w.reduce((s, v) => s + v, 0);
  const a = centred(x, w, total);
  const b = centred(y, w, total);
  const h = [0, 1, 2].map((i) =>
    [0, 1, 2].map((j) => a.reduce((s, p, k) => s + w[k]! * p[i]! * b[k]![j]!, 0)),
  );
  const { u, v } = svd3(h);
  const d = Math.sign(determinant(u) * determinant(v));
  // R = V diag(1, 1, d) U^T maps x on y.
  const rotated = a.map((p) => {
    const q = [0, 1, 2].map((k) => p.reduce((s, value, i) => s + u[i]![k]! * value, 0));
    q[2]! *= d;
    return [0, 1, 2].map((i) => q.reduce((s, value, k) => s + v[i]![k]! * value, 0));
  });
  const sum = rotated.reduce(
    (s, p, k) => s + w[k]! * p.reduce((t, value, i) => t + (value - b[k]![i]!) ** 2, 0),
    0,
  );
  return Math.sqrt(sum / total);
}

/** Least Kabsch RMSD over the given mappings: atom k of x on atom map[k] of y. */
export function bruteForceRmsd(x: Points, y: Points, mappings: Iterable<ArrayLike<number>>): number {
  let best = Number.POSITIVE_INFINITY;
  for (const map of mappings) {
    best = Math.min(
      best,
      kabschRmsd(
        x,
        x.map((_, k) => y[map[k]!]!),
      ),
    );
  }
  return best;
}

/** All members of a group, each restricted to a set of atoms in local numbers. */
export function* everyMapping(chain: StabiliserChain, atoms: ArrayLike<number>): Generator<Int32Array> {
  const local = new Map(Array.from(atoms, (a, k) => [a, k]));
  function* from(level: number, p: Int32Array): Generator<Int32Array> {
    const here = chain.levels[level];
    if (!here) yield Int32Array.from(atoms, (a) => local.get(p[a]!)!);
    else
      for (const u of here.transversal)
        yield* from(
          level + 1,
          u.map((image) => p[image]!),
        );
  }
  yield* from(
    0,
    Int32Array.from({ length: chain.degree }, (_, a) => a),
  );
}

function centred(points: Points, w: readonly number[], total: number): number[][] {
  const mean = [0, 1, 2].map((i) => points.reduce((s, p, k) => s + w[k]! * p[i]!, 0) / total);
  return points.map((p) => p.map((v, i) => v - mean[i]!));
}

function determinant(m: number[][]): number {
  const [a, b, c] = m as [number[], number[], number[]];
  return (
    a[0]! * (b[1]! * c[2]! - b[2]! * c[1]!) -
    a[1]! * (b[0]! * c[2]! - b[2]! * c[0]!) +
    a[2]! * (b[0]! * c[1]! - b[1]! * c[0]!)
  );
}

/** H = U S V^T by one-sided Jacobi rotations of the columns; columns in falling order of singular value. */
function svd3(h: number[][]): { u: number[][]; v: number[][] } {
  const a = h.map((row) => [...row]);
  const v = [0, 1, 2].map((i) => [0, 1, 2].map((j) => (i === j ? 1 : 0)));
  for (let sweep = 0, turned = true; turned && sweep < 60; sweep++) {
    turned = false;
    for (const [p, q] of [
      [0, 1],
      [0, 2],
      [1, 2],
    ] as const) {
      const dot = (i: number, j: number) => a.reduce((s, row) => s + row[i]! * row[j]!, 0);
      const gamma = dot(p, q);
      if (gamma === 0 || gamma * gamma <= 1e-34 * dot(p, p) * dot(q, q)) continue;
      turned = true;
      const zeta = (dot(q, q) - dot(p, p)) / (2 * gamma);
      const t = (zeta >= 0 ? 1 : -1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
      const c = 1 / Math.sqrt(1 + t * t);
      for (const m of [a, v]) {
        for (const row of m) {
          const [x, y] = [row[p]!, row[q]!];
          row[p] = c * x - c * t * y;
          row[q] = c * t * x + c * y;
        }
      }
    }
  }
  const columns = [0, 1, 2]
    .map((j) => ({ left: a.map((row) => row[j]!), right: v.map((row) => row[j]!) }))
    .map((column) => ({ ...column, s: Math.hypot(...column.left) }))
    .sort((one, other) => other.s - one.s);
  const largest = columns[0]!.s;
  const lefts: number[][] = [];
  for (const { left, s } of columns) {
    if (s > 1e-14 * largest && s > 0) lefts.push(left.map((value) => value / s));
    else lefts.push(orthogonalTo(lefts));
  }
  const transpose = (list: number[][]) => [0, 1, 2].map((i) => list.map((column) => column[i]!));
  return { u: transpose(lefts), v: transpose(columns.map(({ right }) => right)) };
}

/** Any unit vector at right angles to those given. */
function orthogonalTo(vectors: number[][]): number[] {
  let best: number[] = [0, 0, 0];
  for (const axis of [0, 1, 2]) {
    let candidate: number[] = [0, 1, 2].map((i) => (i === axis ? 1 : 0));
    for (const v of vectors) {
      const along = v.reduce((s, value, i) => s + value * candidate[i]!, 0);
      candidate = candidate.map((value, i) => value - along * v[i]!);
    }
    if (Math.hypot(...candidate) > Math.hypot(...best)) best = candidate;
  }
  const length = Math.hypot(...best);
  return best.map((value) => value / length);
}

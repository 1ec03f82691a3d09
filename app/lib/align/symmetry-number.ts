import { CosetTree } from "./coset-tree.ts";
import { alignedRmsd, covarianceInto, rotationInto } from "./kernel.ts";
import type { SymmetryPlan } from "./plan.ts";

/** Å: an exchange counts when a proper rotation realises it this closely, whatever tolerance a sift has. */
export const SYMMETRY_TOLERANCE = 0.1;
/** Å: and no atom lies further from the place it maps to. */
export const SYMMETRY_REACH = 0.5;
const DEFAULT_NODE_LIMIT = 100_000;
/** Nodes between two calls of `interrupt`: each may cost a look at all pairs of atoms. */
const NODES_A_LOOK = 256;

/**
 * Symmetry numbers of conformers of one molecule: how many exchanges of equivalent atoms (all atoms, hydrogens
 * included) a proper rotation realises on the conformer. The identity counts. Exchanges are not enumerated: a
 * depth-first search over the stabiliser chain leaves out what the bound on the RMSD or the distances between atoms
 * already placed rule out (both atoms of a pair move by at most 0.5 Å, so their distance changes by at most 1.0 Å).
 * Below the identity most conformers need no search at all: see `heldByFixed`.
 */
export class SymmetryNumber {
  private readonly tree: CosetTree;
  private readonly next: Int32Array;
  /** Local atoms with a final image at each depth: those up to settledTo[depth] in `settled`. */
  private readonly settled: Int32Array;
  private readonly settledTo: Int32Array;
  private readonly m = new Float64Array(9);
  private readonly rotation = new Float64Array(9);
  /** Nodes looked at since the object was made. */
  nodes = 0;
  /** Called now and then during a long count; ends it by throwing. */
  interrupt: (() => void) | null = null;

  /** @param plan over all atoms: `makePlan(graph, "all")` */
  constructor(
    readonly plan: SymmetryPlan,
    /** Nodes allowed to one conformer. */
    public nodeLimit = DEFAULT_NODE_LIMIT,
  ) {
    this.tree = new CosetTree(plan);
    this.next = new Int32Array(plan.levels.length + 1);
    this.settled = new Int32Array(plan.n);
    this.settledTo = new Int32Array(plan.levels.length + 1);
    this.settled.set(plan.rootSingles);
    this.settledTo[0] = plan.rootSingles.length;
    plan.levels.forEach((level, i) => {
      this.settled.set(level.singles, this.settledTo[i]!);
      this.settledTo[i + 1] = this.settledTo[i]! + level.singles.length;
    });
  }

  /**
   * @param shape a shape of the plan at `at`
   * @returns 1 or more; null when the work bound was met or not all exchanges are known
   * @example new SymmetryNumber(makePlan(butane, "all")).count(shape, 0) // 2
   */
  count(shape: Float64Array, at: number): number | null {
    const { tree, plan, next } = this;
    const n = plan.n;
    if (!plan.chain.complete) return null;
    const depths = plan.levels.length;
    if (depths === 0) return 1;
    const e = shape[at + 3 * n]!;
    const need = e - (n * SYMMETRY_TOLERANCE * SYMMETRY_TOLERANCE) / 2 - 1e-12 * e - 1e-30;
    const limit = this.nodes + this.nodeLimit;
    if (this.heldByFixed(shape, at, 0)) return 1;
    let found = 0;
    let depth = 0;
    // The identity is chosen at the depths before this one.
    let identical = 0;
    tree.start(shape, at, shape, at, 1);
    tree.expand(0);
    next[0] = 0;
    while (depth >= 0) {
      const k = next[depth]!;
      if (k >= plan.levels[depth]!.images) {
        depth -= 1;
        continue;
      }
      next[depth] = k + 1;
      if (k === 0 && depth === identical) {
        identical += 1;
        if (identical < depths && this.heldByFixed(shape, at, identical)) {
          found += 1;
          continue;
        }
      } else if (depth < identical) identical = depth;
      if (++this.nodes > limit) return null;
      if (this.nodes % NODES_A_LOOK === 0) this.interrupt?.();
      if (tree.childHopeless(depth, k, need)) continue;
      tree.descend(depth, k);
      if (!this.distancesKept(shape, at, depth + 1)) continue;
      if (depth + 1 === depths) {
        if (this.realised(shape, at, e)) found += 1;
        continue;
      }
      depth += 1;
      tree.expand(depth);
      next[depth] = 0;
    }
    return found;
  }

  /**
   * True when no exchange but the identity that keeps the first `depth` base points can be realised. Such an exchange
   * keeps the atoms settled there, so its rotation turns them by little: with turn t about the axis least felt by
   * them, 4 sin^2(t/2) times their least moment is at most n 0.10^2 Å^2. Nothing then travels further than
   * 2 sin(t/2) |x|, and an atom would have to travel to another of its cell.
   */
  private heldByFixed(shape: Float64Array, at: number, depth: number): boolean {
    const { plan, settled, settledTo } = this;
    const least = leastMoment(shape, at, settled, settledTo[depth]!);
    const square = plan.n * SYMMETRY_TOLERANCE * SYMMETRY_TOLERANCE * (1 + 1e-9);
    if (!(4 * least > square)) return false;
    const chord = Math.sqrt(square / least);
    const { open } = plan.levels[depth]!;
    for (let i = 0; i < open.length; i++) {
      const to = plan.cellStarts[open[i]! + 1]!;
      for (let j = plan.cellStarts[open[i]!]!; j < to; j++) {
        const p = at + 3 * plan.cellAtoms[j]!;
        const x = shape[p]!;
        const y = shape[p + 1]!;
        const z = shape[p + 2]!;
        const reach = SYMMETRY_REACH + 1e-9 + chord * Math.sqrt(x * x + y * y + z * z);
        for (let k = j + 1; k < to; k++) {
          const q = at + 3 * plan.cellAtoms[k]!;
          const dx = shape[q]! - x;
          const dy = shape[q + 1]! - y;
          const dz = shape[q + 2]! - z;
          if (dx * dx + dy * dy + dz * dz <= reach * reach) return false;
        }
      }
    }
    return true;
  }

  /** False when an atom settled at `depth` and one settled by then change their distance too much. */
  private distancesKept(shape: Float64Array, at: number, depth: number): boolean {
    const map = this.tree.mapAt(depth);
    const { settled, settledTo } = this;
    for (let i = settledTo[depth - 1]!; i < settledTo[depth]!; i++) {
      const p = settled[i]!;
      for (let j = 0; j < i; j++) {
        const q = settled[j]!;
        const before = distance(shape, at + 3 * p, at + 3 * q);
        const after = distance(shape, at + 3 * map[p]!, at + 3 * map[q]!);
        if (Math.abs(before - after) > 2 * SYMMETRY_REACH + 1e-9) return false;
      }
    }
    return true;
  }

  private realised(shape: Float64Array, at: number, e: number): boolean {
    const { plan, m, rotation: r } = this;
    const map = this.tree.mapAt(plan.levels.length);
    const n = plan.n;
    if (alignedRmsd(shape, at, e, shape, at, e, n, map, n, 1) > SYMMETRY_TOLERANCE) return false;
    covarianceInto(shape, at, shape, at, n, map, m, 0);
    rotationInto(m, 0, r);
    for (let k = 0; k < n; k++) {
      const a = shape[at + 3 * k]!;
      const b = shape[at + 3 * k + 1]!;
      const c = shape[at + 3 * k + 2]!;
      const j = at + 3 * map[k]!;
      const dx = r[0]! * a + r[1]! * b + r[2]! * c - shape[j]!;
      const dy = r[3]! * a + r[4]! * b + r[5]! * c - shape[j + 1]!;
      const dz = r[6]! * a + r[7]! * b + r[8]! * c - shape[j + 2]!;
      if (dx * dx + dy * dy + dz * dz > SYMMETRY_REACH * SYMMETRY_REACH) return false;
    }
    return true;
  }
}

/**
 * The least moment of inertia (equal weights, about the centroid of the shape) of some of its atoms in Å^2, a little
 * too small rather than too large.
 */
function leastMoment(shape: Float64Array, at: number, atoms: Int32Array, count: number): number {
  let xx = 0;
  let yy = 0;
  let zz = 0;
  let xy = 0;
  let xz = 0;
  let yz = 0;
  for (let k = 0; k < count; k++) {
    const i = at + 3 * atoms[k]!;
    const x = shape[i]!;
    const y = shape[i + 1]!;
    const z = shape[i + 2]!;
    xx += x * x;
    yy += y * y;
    zz += z * z;
    xy += x * y;
    xz += x * z;
    yz += y * z;
  }
  // Trace less the largest eigenvalue of the sum of x x^T, that one from the angles of its cubic.
  const trace = xx + yy + zz;
  const mean = trace / 3;
  const a = xx - mean;
  const b = yy - mean;
  const c = zz - mean;
  const size = Math.sqrt((a * a + b * b + c * c + 2 * (xy * xy + xz * xz + yz * yz)) / 6);
  if (size === 0) return 2 * mean * (1 - 1e-6);
  const determinant = a * (b * c - yz * yz) - xy * (xy * c - yz * xz) + xz * (xy * yz - b * xz);
  const cosine = Math.max(-1, Math.min(1, determinant / (2 * size * size * size)));
  return trace * (1 - 1e-6) - mean - 2 * size * Math.cos(Math.acos(cosine) / 3);
}

function distance(shape: Float64Array, i: number, j: number): number {
  const dx = shape[i]! - shape[j]!;
  const dy = shape[i + 1]! - shape[j + 1]!;
  const dz = shape[i + 2]! - shape[j + 2]!;
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}

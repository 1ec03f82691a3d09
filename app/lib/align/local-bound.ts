import type { CosetTree } from "./coset-tree.ts";
import { largestRoot, rotationInto } from "./kernel.ts";

/**
 * A sharper bound for nodes with many small open cells (CH2, CH3, NH2, rings that can flip): the skeleton holds the
 * rotation, and under nearly one rotation no cell reaches |dx| |dy|.
 *
 * Write the rotation as a turn by t about any axis after the best rotation of the node's M. With the gap A between
 * the two largest roots and, for a mapping of one cell after the best rotation, trace a and axis vector k
 * (sum of dx x dy), the sum of all is at most
 *
 *   l1 + T - G/2 (1 - cos t) + kappa sin t,  T = sum max a,  kappa = sum max |k|,  G = A + T - slack,
 *
 * because the quaternion form of a cell is at most a cos^2(t/2) + |k| sin t + |dx||dy| sin^2(t/2). Its maximum over t
 * is l1 + T - G/2 + sqrt(G^2/4 + kappa^2). What must exceed `need` limits t; within that limit mappings of a cell
 * that a better one outdoes at every t drop out of kappa, and the bound is taken again. Cells of more than three
 * atoms count with |dx||dy|. Derived here; checked against brute force in the tests.
 */
export class LocalBound {
  private readonly rotation = new Float64Array(9);
  /** Trace and |axis vector| of each mapping of each small cell at hand. */
  private readonly traces: Float64Array;
  private readonly axes: Float64Array;
  private readonly sizes: Int32Array;
  private readonly dx = new Float64Array(9);
  private readonly dy = new Float64Array(9);

  constructor(private readonly tree: CosetTree) {
    const cells = tree.plan.cellStarts.length - 1;
    this.traces = new Float64Array(6 * cells);
    this.axes = new Float64Array(6 * cells);
    this.sizes = new Int32Array(cells);
  }

  /** True when nothing below the chosen node at `depth` reaches `need`. */
  hopeless(depth: number, need: number, ceiling: number): boolean {
    const { tree } = this;
    const open = tree.plan.levels[depth]!.open;
    const root = largestRoot(tree.m, 9 * depth, ceiling);
    const gap = rotationInto(tree.m, 9 * depth, this.rotation);
    const slack = tree.slack[depth]!;
    // What the small cells could reach at most; the rest of the slack is of large cells and stays.
    let small = 0;
    for (let i = 0; i < open.length; i++) small += this.measure(open[i]!, i, depth);
    let tangent = Number.POSITIVE_INFINITY;
    for (let round = 0; round < 4; round++) {
      let trace = Math.max(0, slack - small);
      let axis = 0;
      for (let i = 0; i < open.length; i++) {
        if (this.sizes[i] === 0) continue;
        trace += this.bestTrace(i);
        axis += this.largestAxis(i, tangent);
      }
      const half = (gap + trace - slack) / 2;
      const reach = Math.sqrt(half * half + axis * axis);
      const share = (need - root - trace + half) / reach;
      if (share > 1) return true;
      if (!(share > -1)) return false;
      const turn = Math.atan2(axis, half) + Math.acos(share);
      const narrower = turn < Math.PI ? Math.tan(turn / 2) : Number.POSITIVE_INFINITY;
      if (!(narrower < 0.9 * tangent)) return false;
      tangent = narrower;
    }
    return false;
  }

  private bestTrace(i: number): number {
    let best = this.traces[6 * i]!;
    for (let k = 1; k < this.sizes[i]!; k++) best = Math.max(best, this.traces[6 * i + k]!);
    return best;
  }

  /** Largest |k| among the mappings of a cell that no better one outdoes at every turn up to the limit. */
  private largestAxis(i: number, tangent: number): number {
    const best = this.bestTrace(i);
    let axis = 0;
    for (let k = 0; k < this.sizes[i]!; k++) {
      const lag = best - this.traces[6 * i + k]!;
      const its = this.axes[6 * i + k]!;
      if (its > axis && lag <= 2 * tangent * its) axis = its;
    }
    return axis;
  }

  /** Fills traces and axis vectors of all mappings of cell c; returns |dx||dy|, 0 for a cell too large. */
  private measure(c: number, i: number, depth: number): number {
    const { plan, x, xo, y, yo, hand, maps } = this.tree;
    const from = plan.cellStarts[c]!;
    const size = plan.cellStarts[c + 1]! - from;
    this.sizes[i] = size > 3 ? 0 : size === 3 ? 6 : 2;
    if (size > 3) return 0;
    const map = depth * plan.n;
    const r = this.rotation;
    const { dx, dy } = this;
    for (let k = 0; k < size; k++) {
      const p = plan.cellAtoms[from + k]!;
      const s = xo + 3 * p;
      const t = yo + 3 * maps[map + p]!;
      for (let axis = 0; axis < 3; axis++) {
        dx[3 * k + axis] = r[3 * axis]! * x[s]! + r[3 * axis + 1]! * x[s + 1]! + r[3 * axis + 2]! * x[s + 2]!;
        dy[3 * k + axis] = hand * y[t + axis]!;
      }
    }
    const reach = Math.sqrt(centre(dx, size) * centre(dy, size));
    for (let k = 0; k < this.sizes[i]!; k++) this.measureMapping(i, k, size);
    return reach;
  }

  private measureMapping(i: number, k: number, size: number): void {
    const { dx, dy } = this;
    let trace = 0;
    let u = 0;
    let v = 0;
    let w = 0;
    for (let j = 0; j < size; j++) {
      const p = 3 * j;
      const q = 3 * (size === 2 ? (j + k) % 2 : MAPPINGS[3 * k + j]!);
      trace += dx[p]! * dy[q]! + dx[p + 1]! * dy[q + 1]! + dx[p + 2]! * dy[q + 2]!;
      u += dx[p + 1]! * dy[q + 2]! - dx[p + 2]! * dy[q + 1]!;
      v += dx[p + 2]! * dy[q]! - dx[p]! * dy[q + 2]!;
      w += dx[p]! * dy[q + 1]! - dx[p + 1]! * dy[q]!;
    }
    this.traces[6 * i + k] = trace;
    this.axes[6 * i + k] = Math.sqrt(u * u + v * v + w * w);
  }
}

/** The six mappings of three atoms. */
const MAPPINGS = Int32Array.of(0, 1, 2, 1, 2, 0, 2, 0, 1, 0, 2, 1, 2, 1, 0, 1, 0, 2);

/** Moves the centre of the first `size` points to the origin; returns the sum of squares. */
function centre(points: Float64Array, size: number): number {
  let sum = 0;
  for (let axis = 0; axis < 3; axis++) {
    let mean = 0;
    for (let k = 0; k < size; k++) mean += points[3 * k + axis]!;
    mean /= size;
    for (let k = 0; k < size; k++) {
      const d = points[3 * k + axis]! - mean;
      points[3 * k + axis] = d;
      sum += d * d;
    }
  }
  return sum;
}

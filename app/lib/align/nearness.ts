import type { FrameBlock } from "../structure.ts";
import type { SymmetryPlan } from "./plan.ts";
import { profileLength, squareLimit, writeProfile, writeShape } from "./shape.ts";
import { SymmetricRmsd } from "./symmetric-rmsd.ts";

/** Two conformers of a set, by position, and how far apart they are. */
export interface NearPair {
  a: number;
  b: number;
  /** Å */
  rmsd: number;
  /** The mirror image is the nearer one. */
  mirror: boolean;
  /** False where only a bound from above is known. */
  exact: boolean;
}

export interface NearnessInput {
  plan: SymmetryPlan;
  block: FrameBlock;
  /** Frames of the block in the order of the set. */
  rows: Int32Array;
  /** The smaller of proper and mirror RMSD. */
  mirror: boolean;
  /** Å: pairs above it are looked for, pairs within it counted. */
  tolerance: number;
  /** Pairs to list above the tolerance. */
  most: number;
  /** Nodes that one comparison may cost. */
  nodeLimit?: number;
}

export interface Nearness {
  /** Position of the nearest other conformer, of equally near ones the first; -1 in a set of one. */
  nearest: Int32Array;
  /** Å to it; Infinity in a set of one. */
  rmsd: Float64Array;
  /** 0 where the work bound was met: the RMSD is then one from above. */
  exact: Uint8Array;
  /** The pairs just above the tolerance, nearest first. */
  over: NearPair[];
  /** Pairs that lie within the tolerance. */
  within: number;
  /** The farthest of them; null where there is none. */
  farthestWithin: NearPair | null;
}

/** Candidates looked at first: a good guess of the nearest spares most of the others. */
const FIRST = 8;

/**
 * The nearest other conformer of every conformer of a set, and the pairs just above a tolerance: exact, without
 * comparing all pairs, as the distances from the centroid tell which cannot be near (methods page, section 2).
 * Work goes conformer by conformer, so that whoever calls can stop in between.
 *
 * @example
 * const work = new NearnessWork({ plan, block, rows, mirror: true, tolerance: 0.2, most: 5 });
 * while (work.next()) {}
 * work.result.rmsd[0] // Å from the first to its nearest
 */
export class NearnessWork {
  readonly result: Nearness;
  /** Conformers done. */
  done = 0;
  private readonly comparer: SymmetricRmsd;
  private readonly shapes: Float64Array;
  private readonly profiles: Float64Array;
  private readonly bounds: Float64Array;

  /** @throws RangeError on a row outside the block */
  constructor(private readonly input: NearnessInput) {
    const { plan, block, rows } = input;
    const count = rows.length;
    this.comparer = new SymmetricRmsd(plan, input.nodeLimit);
    this.shapes = new Float64Array(count * plan.shapeLength);
    this.profiles = new Float64Array(count * profileLength(plan));
    this.bounds = new Float64Array(count);
    for (let k = 0; k < count; k++) {
      const row = rows[k]!;
      if (!(row >= 0 && row < block.count)) throw new RangeError(`No frame ${row} among ${block.count}.`);
      writeShape(plan, block.positions, 3 * block.atoms * row, this.shapes, k * plan.shapeLength);
      writeProfile(plan, this.shapes, k * plan.shapeLength, this.profiles, k * profileLength(plan));
    }
    this.result = {
      nearest: new Int32Array(count).fill(-1),
      rmsd: new Float64Array(count).fill(Number.POSITIVE_INFINITY),
      exact: new Uint8Array(count).fill(1),
      over: [],
      within: 0,
      farthestWithin: null,
    };
  }

  /** Takes the next conformer; false when all are done. */
  next(): boolean {
    if (this.done >= this.input.rows.length) return false;
    const i = this.done;
    const compared = new Uint8Array(this.input.rows.length);
    for (const j of this.boundsFrom(i)) {
      compared[j] = 1;
      this.compare(i, j);
    }
    for (let j = 0; j < compared.length; j++) if (j !== i && !compared[j]) this.compare(i, j);
    this.done += 1;
    return this.done < this.input.rows.length;
  }

  /** Writes the bounds from below of n RMSD^2 of all pairs with `i`; the few least of them, least first. */
  private boundsFrom(i: number): number[] {
    const { bounds, profiles } = this;
    const length = profileLength(this.input.plan);
    const least: number[] = [];
    for (let j = 0; j < bounds.length; j++) {
      let sum = 0;
      for (let k = 1; k < length; k++) {
        const d = profiles[i * length + k]! - profiles[j * length + k]!;
        sum += d * d;
      }
      bounds[j] = sum;
      if (j === i || (least.length === FIRST && sum >= bounds[least[FIRST - 1]!]!)) continue;
      let at = least.length;
      while (at > 0 && bounds[least[at - 1]!]! > sum) at -= 1;
      least.splice(at, 0, j);
      least.length = Math.min(least.length, FIRST);
    }
    return least;
  }

  private compare(i: number, j: number): void {
    const { plan, mirror, tolerance } = this.input;
    const { rmsd, over } = this.result;
    // Every pair is met from both sides: what concerns the pair is taken at the first.
    const first = j > i;
    const reach = first ? Math.max(rmsd[i]!, tolerance, this.worst()) : rmsd[i]!;
    if (this.bounds[j]! > squareLimit(plan.n, reach)) return;
    const found = Number.isFinite(reach)
      ? this.comparer.decideNear(
          this.shapes,
          i * plan.shapeLength,
          this.shapes,
          j * plan.shapeLength,
          reach,
          mirror,
        )
      : this.comparer.minimum(this.shapes, i * plan.shapeLength, this.shapes, j * plan.shapeLength, mirror);
    if (found === null) {
      if (this.comparer.lastWasCut) this.result.exact[i] = 0;
      return;
    }
    this.offer(i, j, found.rmsd, found.exact);
    this.offer(j, i, found.rmsd, found.exact);
    if (!first) return;
    const pair: NearPair = { a: i, b: j, ...found };
    if (found.rmsd <= tolerance) {
      this.result.within += 1;
      const farthest = this.result.farthestWithin;
      if (farthest === null || found.rmsd > farthest.rmsd) this.result.farthestWithin = pair;
    } else if (found.rmsd < this.worst()) {
      const at = over.findIndex((other) => found.rmsd < other.rmsd);
      over.splice(at < 0 ? over.length : at, 0, pair);
      over.length = Math.min(over.length, this.input.most);
    }
  }

  /** A pair above the tolerance that is not nearer than this does not come into the list. */
  private worst(): number {
    const { over } = this.result;
    if (this.input.most === 0) return 0;
    return over.length < this.input.most ? Number.POSITIVE_INFINITY : over[over.length - 1]!.rmsd;
  }

  private offer(i: number, j: number, value: number, exact: boolean): void {
    const { rmsd, nearest } = this.result;
    if (value > rmsd[i]! || (value === rmsd[i]! && nearest[i]! <= j)) return;
    rmsd[i] = value;
    nearest[i] = j;
    if (!exact) this.result.exact[i] = 0;
  }
}

import { makePlan, type SymmetryPlan } from "../align/plan.ts";
import { writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import type { AtomSet, Graph } from "../structure.ts";

/** Nodes that one comparison on the page may cost: a column of thousands must not hang on a single pair. */
const NODE_LIMIT = 20_000;

/** How a recipe compares. */
export interface DistanceSettings {
  atoms: AtomSet;
  symmetry: boolean;
  /** The mirror image counts too. */
  mirror: boolean;
}

export interface Distance {
  /** Å */
  rmsd: number;
  /** The mirror image is the nearer one. */
  mirror: boolean;
  /** False where only a bound from above is known. */
  exact: boolean;
}

/**
 * Distances among the conformers of one distinct set, with the atoms, symmetry and treatment of mirror images of its
 * recipe. Conformers are added one by one as their coordinates arrive; positions count in the order of adding.
 */
export class ConformerDistances {
  private readonly plan: SymmetryPlan;
  private readonly rmsd: SymmetricRmsd;
  private readonly mirror: boolean;
  private shapes: Float64Array;
  private count = 0;

  constructor(graph: Graph, options: DistanceSettings) {
    this.plan = makePlan(graph, options.atoms, { symmetry: options.symmetry });
    this.rmsd = new SymmetricRmsd(this.plan, NODE_LIMIT);
    this.mirror = options.mirror;
    this.shapes = new Float64Array(this.plan.shapeLength * 16);
  }

  get size(): number {
    return this.count;
  }

  /** Adds one conformer; `positions` are packed x, y, z of all atoms in Å, beginning at `from`. */
  add(positions: Float64Array, from = 0): void {
    const length = this.plan.shapeLength;
    if ((this.count + 1) * length > this.shapes.length) {
      const larger = new Float64Array(2 * this.shapes.length);
      larger.set(this.shapes);
      this.shapes = larger;
    }
    writeShape(this.plan, positions, from, this.shapes, this.count * length);
    this.count += 1;
  }

  /** Distance of two conformers. */
  between(a: number, b: number): Distance {
    this.check(a, b);
    if (a === b) return { rmsd: 0, mirror: false, exact: true };
    const length = this.plan.shapeLength;
    return this.rmsd.minimum(this.shapes, a * length, this.shapes, b * length, this.mirror);
  }

  /**
   * The exchange of equivalent atoms behind the distance of two conformers: atom k of `a` lies on atom p[k] of `b`.
   * With it, and reflected where `mirror` says so, the second can be laid over the first atom by atom.
   */
  exchange(a: number, b: number): { distance: Distance; permutation: Int32Array } {
    const distance = this.between(a, b);
    return { distance, permutation: this.rmsd.permutation() };
  }

  private check(...positions: number[]): void {
    for (const position of positions) {
      if (!Number.isInteger(position) || position < 0 || position >= this.count) {
        throw new RangeError(`There are ${this.count} conformers, asked for number ${position}.`);
      }
    }
  }
}

/**
 * Positions of a conformer in the atom order of another one and, where asked, reflected: ready to be laid over it.
 *
 * @param permutation atom k of the other lies on atom permutation[k] of this one
 */
export function laidOver(
  positions: Float64Array,
  permutation: ArrayLike<number>,
  mirror: boolean,
): Float64Array {
  const out = new Float64Array(positions.length);
  const sign = mirror ? -1 : 1;
  for (let k = 0; k < permutation.length; k++) {
    const from = 3 * permutation[k]!;
    for (let c = 0; c < 3; c++) out[3 * k + c] = sign * positions[from + c]!;
  }
  return out;
}

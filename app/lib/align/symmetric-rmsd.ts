import { CosetTree } from "./coset-tree.ts";
import { alignedRmsd, largestRoot } from "./kernel.ts";
import { LocalBound } from "./local-bound.ts";
import type { SymmetryPlan } from "./plan.ts";
import { distancesExceed } from "./shape.ts";

/** Nodes of the search tree that one comparison may look at before its answer counts as a bound from above. */
export const DEFAULT_NODE_LIMIT = 200_000;

/** Nodes between two calls of `interrupt`: some 20 ms. */
const NODES_A_LOOK = 8192;

/** Nodes after which the sharper, dearer bound joins in: easy pairs are done by then. */
const PLAIN_NODES = 64;

/** Outcome of one comparison. */
export interface Comparison {
  /** Å, least over all exchanges and proper rotations (and reflection where asked); Infinity where none was found within. */
  rmsd: number;
  /** The mirror image of the second shape is the nearer one. */
  mirror: boolean;
  /** False when the work bound was met, or not all exchanges are known: then `rmsd` is a bound from above. */
  exact: boolean;
}

/**
 * Symmetry-corrected RMSD of shapes of one plan: the exact minimum over all exchanges of equivalent atoms and all
 * proper rotations, by depth-first search with bounds over the stabiliser chain, best child first. Nothing is
 * enumerated, and no local optimum can be mistaken for the minimum.
 *
 * One object serves any number of comparisons and allocates nothing in its loops; it is not re-entrant.
 */
export class SymmetricRmsd {
  private readonly tree: CosetTree;
  private readonly local: LocalBound;
  /** Children of the chosen node at each depth that are worth a visit, best first, and their bounds. */
  private readonly order: Int32Array[];
  private readonly bounds: Float64Array[];
  private readonly count: Int32Array;
  private readonly cursor: Int32Array;
  private readonly best: Int32Array;
  private readonly map: Int32Array;
  /** Nodes looked at since the object was made: a measure of work that does not depend on the machine. */
  nodes = 0;
  /** Called now and then during a long search; ends it by throwing. */
  interrupt: (() => void) | null = null;
  private cut = false;

  constructor(
    readonly plan: SymmetryPlan,
    /** Nodes allowed to one comparison (to each hand of it). */
    public nodeLimit = DEFAULT_NODE_LIMIT,
  ) {
    this.tree = new CosetTree(plan);
    this.local = new LocalBound(this.tree);
    this.order = plan.levels.map((level) => new Int32Array(level.images));
    this.bounds = plan.levels.map((level) => new Float64Array(level.images));
    this.count = new Int32Array(plan.levels.length);
    this.cursor = new Int32Array(plan.levels.length);
    this.best = new Int32Array(plan.levels.length);
    this.map = Int32Array.from({ length: plan.n }, (_, k) => k);
  }

  /**
   * Whether two shapes lie within a tolerance of each other, and how far apart they then are.
   *
   * @param x, y arrays that hold shapes as `writeShape` wrote them, at `xo` and `yo`
   * @param tolerance Å; "within" is <=, without slack
   * @param mirror also the mirror image of y; it is named only where it is truly nearer
   * @returns null when the shapes are further apart: certain unless `lastWasCut`
   */
  decide(
    x: Float64Array,
    xo: number,
    y: Float64Array,
    yo: number,
    tolerance: number,
    mirror: boolean,
  ): Comparison | null {
    if (distancesExceed(this.plan, x, xo, y, yo, tolerance)) {
      this.cut = false;
      return null;
    }
    return this.decideNear(x, xo, y, yo, tolerance, mirror);
  }

  /** `decide` for shapes whose distances from the centroid have been compared before. */
  decideNear(
    x: Float64Array,
    xo: number,
    y: Float64Array,
    yo: number,
    tolerance: number,
    mirror: boolean,
  ): Comparison | null {
    this.cut = false;
    const n = this.plan.n;
    const spread = x[xo + 3 * n]! + y[yo + 3 * n]!;
    // The last term lets a single atom, all of whose sums are 0, pass at tolerance 0.
    const floor = (spread - n * tolerance * tolerance) / 2 - 1e-12 * spread - 1e-30;
    const result = this.least(x, xo, y, yo, floor, mirror ? BOTH : PROPER);
    return result.rmsd <= tolerance ? result : null;
  }

  /** True when the work bound was met in the last comparison: a "further apart" of `decide` is then not proven. */
  get lastWasCut(): boolean {
    return this.cut || !this.plan.chain.complete;
  }

  /** The least RMSD of two shapes, however far apart. */
  minimum(x: Float64Array, xo: number, y: Float64Array, yo: number, mirror = false): Comparison {
    this.cut = false;
    return this.least(x, xo, y, yo, Number.NEGATIVE_INFINITY, mirror ? BOTH : PROPER);
  }

  /** RMSD of a shape to its own mirror image. */
  toOwnMirror(x: Float64Array, xo: number): Comparison {
    this.cut = false;
    return this.least(x, xo, x, xo, Number.NEGATIVE_INFINITY, MIRROR);
  }

  /**
   * The exchange behind the last answer, over all atoms of the molecule: atom a of x lies on atom p[a] of y.
   * Atoms outside the plan's set follow one of the exchanges that agree on the set.
   */
  permutation(): Int32Array {
    const { chain } = this.plan;
    const p = Int32Array.from({ length: chain.degree }, (_, a) => a);
    for (let i = chain.levels.length - 1; i >= 0; i--) {
      const u = chain.levels[i]!.transversal[this.best[i]!]!;
      for (let a = 0; a < p.length; a++) p[a] = u[p[a]!]!;
    }
    return p;
  }

  private least(
    x: Float64Array,
    xo: number,
    y: Float64Array,
    yo: number,
    floor: number,
    hands: readonly (1 | -1)[],
  ): Comparison {
    const n = this.plan.n;
    const result = { rmsd: Number.POSITIVE_INFINITY, mirror: false, exact: true };
    let need = floor;
    for (const hand of hands) {
      const root = this.search(x, xo, y, yo, hand, need);
      if (root < 0) continue;
      need = root;
      result.mirror = hand < 0;
      result.rmsd = this.value(x, xo, y, yo, n, hand);
    }
    result.exact = !this.lastWasCut;
    return result;
  }

  /** RMSD of the best exchange found, by the one path that values come from. */
  private value(x: Float64Array, xo: number, y: Float64Array, yo: number, n: number, hand: 1 | -1): number {
    const { plan, map } = this;
    for (let k = 0; k < n; k++) map[k] = k;
    // From the last level to the first: map = u_i after what the later levels do.
    for (let i = plan.levels.length - 1; i >= 0; i--) {
      const row = this.best[i]! * n;
      const u = plan.levels[i]!.permutations;
      for (let k = 0; k < n; k++) map[k] = u[row + map[k]!]!;
    }
    return alignedRmsd(x, xo, x[xo + 3 * n]!, y, yo, y[yo + 3 * n]!, n, map, n, hand);
  }

  /**
   * The largest root over all exchanges that is above `need` by more than rounding, its choices in `best`;
   * -1 when there is none.
   */
  private search(
    x: Float64Array,
    xo: number,
    y: Float64Array,
    yo: number,
    hand: 1 | -1,
    floor: number,
  ): number {
    const { tree, plan } = this;
    const n = plan.n;
    const spread = x[xo + 3 * n]! + y[yo + 3 * n]!;
    const rounding = 1e-13 * spread;
    const last = tree.depth - 1;
    let need = floor + rounding;
    let found = -1;
    let nodes = 1;
    tree.start(x, xo, y, yo, hand);
    this.nodes += 1;
    if (tree.hopeless(0, need)) return -1;
    if (last < 0) {
      const root = largestRoot(tree.m, 0, spread / 2);
      return root > need ? root : -1;
    }
    let depth = 0;
    let look = NODES_A_LOOK;
    nodes += this.open(0, need, spread / 2);
    while (depth >= 0) {
      const next = this.cursor[depth]!;
      const k = this.order[depth]![next]!;
      if (next >= this.count[depth]! || this.bounds[depth]![k]! <= need) {
        depth -= 1;
        continue;
      }
      this.cursor[depth] = next + 1;
      if (depth === last) {
        found = this.bounds[depth]![k]!;
        need = found + rounding;
        tree.chosen[depth] = k;
        this.best.set(tree.chosen);
        continue;
      }
      if (nodes > this.nodeLimit) {
        this.cut = true;
        break;
      }
      if (nodes > look) {
        look = nodes + NODES_A_LOOK;
        this.interrupt?.();
      }
      tree.descend(depth, k);
      // The margin covers the rounding of the sharper bound, whose parts are carried from node to node.
      if (nodes > PLAIN_NODES && this.local.hopeless(depth + 1, need - 100 * rounding, spread / 2)) {
        nodes += 4;
        continue;
      }
      depth += 1;
      nodes += this.open(depth, need, spread / 2);
    }
    this.nodes += nodes;
    return found;
  }

  /** Lists the children of the chosen node that may still reach `need`, best bound first. Returns their number before that. */
  private open(depth: number, need: number, ceiling: number): number {
    const { tree } = this;
    const images = this.plan.levels[depth]!.images;
    const order = this.order[depth]!;
    const bounds = this.bounds[depth]!;
    tree.expand(depth);
    let count = 0;
    for (let k = 0; k < images; k++) {
      if (tree.childHopeless(depth, k, need)) continue;
      bounds[k] = largestRoot(tree.childM[depth]!, 9 * k, ceiling) + tree.childSlack[depth]![k]!;
      let j = count++;
      while (j > 0 && bounds[order[j - 1]!]! < bounds[k]!) {
        order[j] = order[j - 1]!;
        j--;
      }
      order[j] = k;
    }
    this.count[depth] = count;
    this.cursor[depth] = 0;
    return images;
  }
}

const PROPER = [1] as const;
const MIRROR = [-1] as const;
const BOTH = [1, -1] as const;

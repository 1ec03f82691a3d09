import { rootBelow } from "./kernel.ts";
import type { SymmetryPlan } from "./plan.ts";

/**
 * The tree of partly chosen exchanges g for one pair of shapes. A node at depth i has fixed the images of the first i
 * base points by a map h; what may still follow moves atoms only inside the cells of that depth, and carries cell c
 * onto h(c). With centres and deviations of the cells,
 *
 *   M(g) = M + sum over open cells of sum_p dx_p dy_g(p)^T,  M = sum x_p y_h(p)^T + sum_c n_c xbar_c ybar_h(c)^T,
 *
 * and the largest root is subadditive, so lmax(M(g)) <= lmax(M) + slack, slack = sum_c |dx_c| |dy_h(c)|: one test on
 * few numbers rejects everything below a node. At a leaf the slack is 0 and M that of a whole exchange.
 *
 * M and slack are carried from parent to child by the cells that fall apart; they decide, but are never shown.
 */
export class CosetTree {
  readonly depth: number;
  /** M of the chosen node at each depth (9 each) and its slack. */
  readonly m: Float64Array;
  readonly slack: Float64Array;
  /** Chosen child at each depth. */
  readonly chosen: Int32Array;
  /** M and slack of all children of the chosen node at each depth. */
  readonly childM: Float64Array[];
  readonly childSlack: Float64Array[];
  /** Map h of the chosen node at each depth, n each. */
  readonly maps: Int32Array;
  private readonly rest = new Float64Array(9);
  /** The pair: arrays, offsets, and -1 where the mirror image of y is meant. */
  x: Float64Array = new Float64Array(0);
  xo = 0;
  y: Float64Array = new Float64Array(0);
  yo = 0;
  hand: 1 | -1 = 1;

  constructor(readonly plan: SymmetryPlan) {
    this.depth = plan.levels.length;
    this.m = new Float64Array(9 * (this.depth + 1));
    this.slack = new Float64Array(this.depth + 1);
    this.chosen = new Int32Array(this.depth);
    this.childM = plan.levels.map((level) => new Float64Array(9 * level.images));
    this.childSlack = plan.levels.map((level) => new Float64Array(level.images));
    this.maps = new Int32Array((this.depth + 1) * plan.n);
    for (let k = 0; k < plan.n; k++) this.maps[k] = k;
  }

  /** Sets the pair and the root node. `hand` -1 takes the mirror image of y. */
  start(x: Float64Array, xo: number, y: Float64Array, yo: number, hand: 1 | -1): void {
    this.x = x;
    this.xo = xo;
    this.y = y;
    this.yo = yo;
    this.hand = hand;
    const { rootSingles, rootCells, n } = this.plan;
    let m0 = 0;
    let m1 = 0;
    let m2 = 0;
    let m3 = 0;
    let m4 = 0;
    let m5 = 0;
    let m6 = 0;
    let m7 = 0;
    let m8 = 0;
    for (let s = 0; s < rootSingles.length; s++) {
      const k = 3 * rootSingles[s]!;
      const a = x[xo + k]!;
      const b = x[xo + k + 1]!;
      const c = x[xo + k + 2]!;
      const p = y[yo + k]!;
      const q = y[yo + k + 1]!;
      const r = y[yo + k + 2]!;
      m0 += a * p;
      m1 += a * q;
      m2 += a * r;
      m3 += b * p;
      m4 += b * q;
      m5 += b * r;
      m6 += c * p;
      m7 += c * q;
      m8 += c * r;
    }
    let slack = 0;
    for (let s = 0; s < rootCells.length; s++) {
      const cell = rootCells[s]!;
      const k = 4 * n + 1 + 4 * cell;
      const share = 1 / this.countOf(cell);
      const a = share * x[xo + k]!;
      const b = share * x[xo + k + 1]!;
      const c = share * x[xo + k + 2]!;
      const p = y[yo + k]!;
      const q = y[yo + k + 1]!;
      const r = y[yo + k + 2]!;
      m0 += a * p;
      m1 += a * q;
      m2 += a * r;
      m3 += b * p;
      m4 += b * q;
      m5 += b * r;
      m6 += c * p;
      m7 += c * q;
      m8 += c * r;
      slack += x[xo + k + 3]! * y[yo + k + 3]!;
    }
    const m = this.m;
    m[0] = hand * m0;
    m[1] = hand * m1;
    m[2] = hand * m2;
    m[3] = hand * m3;
    m[4] = hand * m4;
    m[5] = hand * m5;
    m[6] = hand * m6;
    m[7] = hand * m7;
    m[8] = hand * m8;
    this.slack[0] = slack;
  }

  /** True when nothing below the chosen node at `depth` reaches `need`. */
  hopeless(depth: number, need: number): boolean {
    return rootBelow(this.m, 9 * depth, need - this.slack[depth]!);
  }

  /** True when nothing below child `k` of the chosen node at `depth` reaches `need`. */
  childHopeless(depth: number, k: number, need: number): boolean {
    return rootBelow(this.childM[depth]!, 9 * k, need - this.childSlack[depth]![k]!);
  }

  /** Works out M and slack of all children of the chosen node at `depth`. */
  expand(depth: number): void {
    const level = this.plan.levels[depth]!;
    const base = this.withoutRemoved(depth);
    for (let k = 0; k < level.images; k++) this.fillChild(depth, k, base);
  }

  /** Chooses child `k` of the node at `depth`; it becomes the node at `depth` + 1. */
  descend(depth: number, k: number): void {
    const n = this.plan.n;
    const u = this.plan.levels[depth]!.permutations;
    const from = depth * n;
    const to = from + n;
    for (let p = 0; p < n; p++) this.maps[to + p] = this.maps[from + u[k * n + p]!]!;
    const source = this.childM[depth]!;
    for (let j = 0; j < 9; j++) this.m[9 * depth + 9 + j] = source[9 * k + j]!;
    this.slack[depth + 1] = this.childSlack[depth]![k]!;
    this.chosen[depth] = k;
  }

  /** Map of the chosen node at `depth`: final for atoms that are single there. */
  mapAt(depth: number): Int32Array {
    return this.maps.subarray(depth * this.plan.n, (depth + 1) * this.plan.n);
  }

  /** M of the node at `depth` without its cells that fall apart goes to `rest`; returns the slack without theirs. */
  private withoutRemoved(depth: number): number {
    const { plan, x, xo, rest } = this;
    const removed = plan.levels[depth]!.removed;
    let slack = this.slack[depth]!;
    for (let j = 0; j < 9; j++) rest[j] = this.m[9 * depth + j]!;
    for (const c of removed) {
      const t = xo + 4 * plan.n + 1 + 4 * c;
      slack -= x[t + 3]! * this.sumImages(c, depth * plan.n, null, 0);
      addOuter(rest, 0, x, t, IMAGE, 0, -this.hand / this.countOf(c));
    }
    return Math.max(0, slack);
  }

  private fillChild(depth: number, k: number, slackWithout: number): void {
    const { plan, x, xo, y, yo, hand } = this;
    const level = plan.levels[depth]!;
    const m = this.childM[depth]!;
    const at = 9 * k;
    for (let j = 0; j < 9; j++) m[at + j] = this.rest[j]!;
    const map = depth * plan.n;
    const u = level.permutations;
    const row = k * plan.n;
    const { singles, added } = level;
    for (let s = 0; s < singles.length; s++) {
      const p = singles[s]!;
      addOuter(m, at, x, xo + 3 * p, y, yo + 3 * this.maps[map + u[row + p]!]!, hand);
    }
    let slack = slackWithout;
    for (let s = 0; s < added.length; s++) {
      const c = added[s]!;
      const t = xo + 4 * plan.n + 1 + 4 * c;
      slack += x[t + 3]! * this.sumImages(c, map, u, row);
      addOuter(m, at, x, t, IMAGE, 0, hand / this.countOf(c));
    }
    this.childSlack[depth]![k] = slack;
  }

  /** Sum of the positions of the images of cell c into IMAGE; returns the norm of their deviations, never too small. */
  private sumImages(c: number, map: number, u: Int32Array | null, row: number): number {
    const { plan, maps, y, yo } = this;
    const to = plan.cellStarts[c + 1]!;
    let sx = 0;
    let sy = 0;
    let sz = 0;
    let squares = 0;
    for (let j = plan.cellStarts[c]!; j < to; j++) {
      const p = plan.cellAtoms[j]!;
      const i = yo + 3 * maps[map + (u ? u[row + p]! : p)]!;
      const a = y[i]!;
      const b = y[i + 1]!;
      const d = y[i + 2]!;
      sx += a;
      sy += b;
      sz += d;
      squares += a * a + b * b + d * d;
    }
    IMAGE[0] = sx;
    IMAGE[1] = sy;
    IMAGE[2] = sz;
    // The difference loses digits: the added share keeps the bound a bound.
    const inside = squares - (sx * sx + sy * sy + sz * sz) / this.countOf(c);
    return Math.sqrt(Math.max(0, inside) + 1e-13 * squares);
  }

  private countOf(c: number): number {
    return this.plan.cellStarts[c + 1]! - this.plan.cellStarts[c]!;
  }
}

/** Scratch: sum of the images of a cell. */
const IMAGE = new Float64Array(3);

function addOuter(
  m: Float64Array,
  at: number,
  x: Float64Array,
  i: number,
  y: Float64Array,
  j: number,
  factor: number,
): void {
  const a = factor * x[i]!;
  const b = factor * x[i + 1]!;
  const c = factor * x[i + 2]!;
  const p = y[j]!;
  const q = y[j + 1]!;
  const r = y[j + 2]!;
  m[at]! += a * p;
  m[at + 1]! += a * q;
  m[at + 2]! += a * r;
  m[at + 3]! += b * p;
  m[at + 4]! += b * q;
  m[at + 5]! += b * r;
  m[at + 6]! += c * p;
  m[at + 7]! += c * q;
  m[at + 8]! += c * r;
}

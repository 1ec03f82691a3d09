/** What a check needs to know of the rule for bonds; atoms in local numbers 0..n-1, squares in Å^2. */
export interface BondRule {
  readonly count: number;
  isHydrogen(atom: number): boolean;
  bondLimit(a: number, b: number): number;
  contestedLimit(a: number, b: number): number;
  /** Nearer than that is too close for a molecule. */
  readonly tooClose: number;
}

/**
 * Whether a frame has exactly the bonds of the frame before and nothing else to tell of, without looking at every
 * pair: a hydrogen lies by the atom that it is bonded to, so that two atoms with their hydrogens have nothing to do
 * with each other once they are far enough apart themselves.
 */
export class BondCheck {
  /** Atoms that are no hydrogen of another one, then for each the hydrogens from starts[k] to starts[k + 1]. */
  private readonly anchors: Int32Array;
  private readonly starts: Int32Array;
  private readonly hydrogens: Int32Array;
  /** Squared limits for pairs of anchors, hydrogen and its anchor, hydrogen and any anchor, two hydrogens. */
  private readonly nearest: Float64Array;
  private readonly farthest: Float64Array;
  private readonly bondToAnchor: Float64Array;
  private readonly besideAnchor: Float64Array;
  private readonly betweenHydrogens: number;
  private readonly reachAnchors: number;
  private readonly reachMixed: number;
  private readonly tooClose: number;
  /** Bonds between anchors. */
  private readonly bonds: number;

  /** @param bonds flat pairs in local numbers */
  constructor(rule: BondRule, bonds: ArrayLike<number>) {
    const { count } = rule;
    const partners: number[][] = Array.from({ length: count }, () => []);
    for (let k = 0; k < bonds.length; k += 2) {
      partners[bonds[k]!]!.push(bonds[k + 1]!);
      partners[bonds[k + 1]!]!.push(bonds[k]!);
    }
    const isBound = (a: number) =>
      rule.isHydrogen(a) && partners[a]!.length === 1 && !rule.isHydrogen(partners[a]![0]!);
    const every = Array.from({ length: count }, (_, a) => a);
    const anchors = every.filter((a) => !isBound(a));
    const groups = anchors.map((a) => partners[a]!.filter(isBound));
    const m = anchors.length;
    this.anchors = Int32Array.from(anchors);
    this.hydrogens = Int32Array.from(groups.flat());
    this.starts = new Int32Array(m + 1);
    groups.forEach((group, k) => {
      this.starts[k + 1] = this.starts[k]! + group.length;
    });
    const close = rule.tooClose * rule.tooClose;
    this.tooClose = close;
    this.nearest = new Float64Array(m * m);
    this.farthest = new Float64Array(m * m);
    let reach = close;
    let between = 0;
    anchors.forEach((a, i) => {
      anchors.forEach((b, j) => {
        const bonded = partners[a]!.includes(b);
        between += Number(bonded);
        this.nearest[i * m + j] = bonded ? close : Math.max(close, rule.contestedLimit(a, b));
        this.farthest[i * m + j] = bonded ? rule.bondLimit(a, b) : Number.POSITIVE_INFINITY;
        reach = Math.max(reach, rule.contestedLimit(a, b));
      });
    });
    this.bonds = between / 2;
    const h = this.hydrogens[0] ?? 0;
    const any = this.hydrogens.length > 0;
    this.bondToAnchor = Float64Array.from(anchors, (a) => (any ? rule.bondLimit(h, a) : 0));
    this.besideAnchor = Float64Array.from(anchors, (a) =>
      Math.max(close, any ? rule.contestedLimit(h, a) : 0),
    );
    this.betweenHydrogens = Math.max(close, any ? rule.contestedLimit(h, h) : 0);
    this.reachAnchors = Math.sqrt(reach);
    this.reachMixed = Math.sqrt(Math.max(...this.besideAnchor, 0));
  }

  /**
   * @param xyz packed coordinates of the local atoms
   * @returns true only when the bonds are the same, no pair is contested and none too close
   */
  holds(xyz: Float64Array): boolean {
    const longest = this.longestToHydrogen(xyz);
    if (longest < 0) return false;
    const far = Math.max(
      this.reachAnchors,
      this.reachMixed + longest,
      Math.sqrt(this.betweenHydrogens) + 2 * longest,
    );
    const limit = far * far * (1 + 1e-9);
    const { anchors, nearest, farthest } = this;
    const m = anchors.length;
    let bonds = 0;
    for (let i = 0; i < m; i++) {
      const p = 3 * anchors[i]!;
      const x = xyz[p]!;
      const y = xyz[p + 1]!;
      const z = xyz[p + 2]!;
      for (let j = i + 1; j < m; j++) {
        const q = 3 * anchors[j]!;
        const dx = xyz[q]! - x;
        const dy = xyz[q + 1]! - y;
        const dz = xyz[q + 2]! - z;
        const square = dx * dx + dy * dy + dz * dz;
        if (square > limit) continue;
        const most = farthest[i * m + j]!;
        if (square <= nearest[i * m + j]! || square > most) return false;
        if (most < Number.POSITIVE_INFINITY) bonds += 1;
        if (!this.apart(xyz, i, j)) return false;
      }
    }
    return bonds === this.bonds;
  }

  /** Å from an anchor to its farthest hydrogen; -1 where hydrogens are not bonded as before, or meet each other. */
  private longestToHydrogen(xyz: Float64Array): number {
    const { anchors, starts, hydrogens } = this;
    let longest = 0;
    for (let i = 0; i < anchors.length; i++) {
      for (let k = starts[i]!; k < starts[i + 1]!; k++) {
        const square = squareBetween(xyz, anchors[i]!, hydrogens[k]!);
        if (square <= this.tooClose || square > this.bondToAnchor[i]!) return -1;
        if (square > longest) longest = square;
        for (let l = starts[i]!; l < k; l++) {
          if (squareBetween(xyz, hydrogens[l]!, hydrogens[k]!) <= this.betweenHydrogens) return -1;
        }
      }
    }
    return Math.sqrt(longest);
  }

  /** True when no hydrogen of one anchor is near the other anchor or one of its hydrogens. */
  private apart(xyz: Float64Array, i: number, j: number): boolean {
    const { anchors, starts, hydrogens, besideAnchor } = this;
    for (let l = starts[j]!; l < starts[j + 1]!; l++) {
      if (squareBetween(xyz, anchors[i]!, hydrogens[l]!) <= besideAnchor[i]!) return false;
    }
    for (let k = starts[i]!; k < starts[i + 1]!; k++) {
      if (squareBetween(xyz, anchors[j]!, hydrogens[k]!) <= besideAnchor[j]!) return false;
      for (let l = starts[j]!; l < starts[j + 1]!; l++) {
        if (squareBetween(xyz, hydrogens[k]!, hydrogens[l]!) <= this.betweenHydrogens) return false;
      }
    }
    return true;
  }
}

function squareBetween(xyz: Float64Array, a: number, b: number): number {
  const dx = xyz[3 * a]! - xyz[3 * b]!;
  const dy = xyz[3 * a + 1]! - xyz[3 * b + 1]!;
  const dz = xyz[3 * a + 2]! - xyz[3 * b + 2]!;
  return dx * dx + dy * dy + dz * dz;
}

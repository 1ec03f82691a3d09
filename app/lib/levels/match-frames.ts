import { makePlan, type SymmetryPlan } from "../align/plan.ts";
import { profileLength, squareLimit, writeProfile, writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import { LeaderIndex, profileDirections } from "../sift/leader-index.ts";
import { ShapeStore } from "../sift/shape-store.ts";
import { FRUGAL_NODE_LIMIT, GENEROUS_NODES } from "../sift/work-limits.ts";
import type { AtomSet, FrameBlock, Graph } from "../structure.ts";

/** Frames of one molecule, in the same order of atoms, with their numbers in their own file. */
export interface NumberedFrames {
  block: FrameBlock;
  /** From 1, ascending. */
  numbers: Int32Array;
}

export interface MatchInput {
  graph: Graph;
  /** Of the ensemble. */
  own: NumberedFrames;
  /** Of the other file. */
  other: NumberedFrames;
  atoms: AtomSet;
  symmetry: boolean;
  /** Å; "within" is <=. */
  tolerance: number;
  /** Mirror images are the same conformer; they are matched after everything that fits without reflection. */
  mirror: boolean;
}

/** Two frames that lie within the tolerance although one of them has its partner already. Rows from 0. */
export interface SharedFrame {
  row: number;
  /** The nearest row of the other set that lies within the tolerance. */
  nearest: number;
  rmsd: number;
}

export interface FrameMatches {
  /** Row of the other set for each own row; -1 where it has none. */
  partner: Int32Array;
  /** Å, of each matched own row; 0 for equal coordinates. */
  rmsd: Float64Array;
  /** 1 equal coordinates, 2 by structure, 3 by its mirror image; 0 without a partner. */
  how: Uint8Array;
  /** Own rows without a partner whose nearest frame belongs to another (two to one), and the same the other way round. */
  shared: SharedFrame[];
  sharedOther: SharedFrame[];
  /** All remaining frames stand in the same order in both files, each within the tolerance of its own. */
  inOrder: boolean;
  /** False where the work bound was met: some frames may then have a partner that is not named. */
  complete: boolean;
  /** Pairs whose geometry was compared. */
  pairs: number;
}

/** Pairs that are compared before only the likeliest are: some seconds. */
export const PAIR_LIMIT = 4_000_000;

/** Parts of the tolerance that are looked at in turn: what lies near is matched before anything far is compared. */
const STEPS = [1 / 64, 1 / 16, 1 / 4, 1] as const;

/** Differences below this in Å are rounding: then the same place in the file decides. */
const ROUNDING = 1e6;

/**
 * Matches the frames of two files of one molecule one to one.
 *
 * Equal coordinates match first, those at the same place before others. Of the rest, pairs within the tolerance are
 * taken from the nearest on: so each is the other's nearest among what is left. What then lies within the tolerance of
 * a frame that has its partner is listed as two to one.
 *
 * @example matchFrames({ graph, own, other, atoms: "heavy+polarH", symmetry: true, tolerance: 0.2, mirror: false }).partner
 */
export function matchFrames(input: MatchInput, pairLimit = PAIR_LIMIT): FrameMatches {
  const matches: FrameMatches = {
    partner: new Int32Array(input.own.numbers.length).fill(-1),
    rmsd: new Float64Array(input.own.numbers.length),
    how: new Uint8Array(input.own.numbers.length),
    shared: [],
    sharedOther: [],
    inOrder: false,
    complete: true,
    pairs: 0,
  };
  const taken = new Uint8Array(input.other.numbers.length);
  matchEqual(input, matches, taken);
  if (matches.partner.includes(-1)) new StructureMatcher(input, matches, taken, pairLimit).run();
  return matches;
}

/** A number for the coordinates of a frame: equal ones have equal numbers. */
function hashes(block: FrameBlock): Float64Array {
  const length = 3 * block.atoms;
  const one = new Float64Array(1);
  const words = new Uint32Array(one.buffer);
  return Float64Array.from({ length: block.count }, (_, row) => {
    let a = 0x811c9dc5;
    let b = 0x9747b28c;
    for (let k = row * length; k < (row + 1) * length; k++) {
      // -0 and 0 are the same place.
      one[0] = block.positions[k]! + 0;
      a = Math.imul(a ^ words[0]!, 0x01000193) ^ words[1]!;
      b = Math.imul(b ^ words[1]!, 0x85ebca6b) ^ (b >>> 13) ^ words[0]!;
    }
    return (a >>> 0) * 2 ** 21 + ((b >>> 0) & 0x1fffff);
  });
}

function sameCoordinates(a: FrameBlock, i: number, b: FrameBlock, j: number): boolean {
  const length = 3 * a.atoms;
  for (let k = 0; k < length; k++) {
    if (a.positions[i * length + k] !== b.positions[j * length + k]) return false;
  }
  return true;
}

function matchEqual({ own, other }: MatchInput, matches: FrameMatches, taken: Uint8Array): void {
  const rowsOf = new Map<number, number[]>();
  hashes(other.block).forEach((hash, row) => {
    const rows = rowsOf.get(hash);
    if (rows) rows.push(row);
    else rowsOf.set(hash, [row]);
  });
  const mine = hashes(own.block);
  const match = (row: number, wanted: (j: number) => boolean) => {
    const found = rowsOf
      .get(mine[row]!)
      ?.find((j) => taken[j] === 0 && wanted(j) && sameCoordinates(own.block, row, other.block, j));
    if (found === undefined) return;
    matches.partner[row] = found;
    matches.how[row] = 1;
    taken[found] = 1;
  };
  for (let row = 0; row < mine.length; row++) {
    match(row, (j) => other.numbers[j] === own.numbers[row]);
  }
  for (let row = 0; row < mine.length; row++) if (matches.how[row] === 0) match(row, () => true);
}

/** Pairs within the tolerance, in flat arrays that grow. */
class PairList {
  count = 0;
  own = new Int32Array(1024);
  other = new Int32Array(1024);
  rmsd = new Float64Array(1024);
  mirror = new Uint8Array(1024);

  add(own: number, other: number, rmsd: number, mirror: boolean): void {
    if (this.count === this.own.length) {
      const size = 2 * this.count;
      this.own = grown(this.own, new Int32Array(size));
      this.other = grown(this.other, new Int32Array(size));
      this.rmsd = grown(this.rmsd, new Float64Array(size));
      this.mirror = grown(this.mirror, new Uint8Array(size));
    }
    this.own[this.count] = own;
    this.other[this.count] = other;
    this.rmsd[this.count] = rmsd;
    this.mirror[this.count] = mirror ? 1 : 0;
    this.count += 1;
  }
}

function grown<A extends Int32Array | Float64Array | Uint8Array>(small: A, large: A): A {
  large.set(small);
  return large;
}

class StructureMatcher {
  private readonly plan: SymmetryPlan;
  private readonly comparer: SymmetricRmsd;
  private readonly shapes: ShapeStore;
  private readonly profiles: ShapeStore;
  private readonly shape: Float64Array;
  private readonly profile: Float64Array;
  /** Rows that are still open. */
  private readonly open: Int32Array;
  private found = new PairList();

  constructor(
    private readonly input: MatchInput,
    private readonly matches: FrameMatches,
    private readonly taken: Uint8Array,
    private readonly pairLimit: number,
  ) {
    this.plan = makePlan(input.graph, input.atoms, { symmetry: input.symmetry });
    this.comparer = new SymmetricRmsd(this.plan);
    this.shapes = new ShapeStore(this.plan.shapeLength);
    this.profiles = new ShapeStore(profileLength(this.plan));
    this.shape = new Float64Array(this.plan.shapeLength);
    this.profile = new Float64Array(profileLength(this.plan));
    this.open = Int32Array.from(rowsWhere(matches.partner.length, (row) => matches.partner[row] === -1));
  }

  run(): void {
    const { input, matches } = this;
    const every = input.other.block.count;
    if (every === 0) return;
    for (let row = 0; row < every; row++) {
      this.load(input.other.block, row);
      this.profiles.push(this.profile);
      this.shapes.push(this.shape);
    }
    if (this.matchInOrder()) return;
    for (const mirror of input.mirror ? [false, true] : [false]) {
      for (const step of STEPS) this.matchWithin(step * input.tolerance, mirror);
    }
    // Whoever is left over and lies at a frame that has its partner is listed.
    this.found = new PairList();
    this.comparePairs(
      input.tolerance,
      input.mirror,
      (row) => matches.partner[row] === -1,
      () => true,
    );
    this.listShared();
    this.found = new PairList();
    const own = (row: number) => matches.partner[row] !== -1;
    this.comparePairs(input.tolerance, input.mirror, own, (other) => this.taken[other] === 0);
    this.listSharedOther();
  }

  private matchWithin(tolerance: number, mirror: boolean): void {
    const { matches, taken } = this;
    this.found = new PairList();
    this.comparePairs(
      tolerance,
      mirror,
      (row) => matches.partner[row] === -1,
      (other) => taken[other] === 0,
    );
    this.takeNearest();
  }

  /** All pairs of the wanted rows that lie within a tolerance. */
  private comparePairs(
    tolerance: number,
    mirror: boolean,
    ownWanted: (row: number) => boolean,
    otherWanted: (row: number) => boolean,
  ): void {
    const { plan, input } = this;
    const others = Int32Array.from(rowsWhere(input.other.block.count, otherWanted));
    const rows = Int32Array.from(rowsWhere(input.own.block.count, ownWanted));
    if (others.length === 0 || rows.length === 0) return;
    const directions = profileDirections(plan, input.other.block, others);
    const index = new LeaderIndex(plan.n, directions, this.profiles, squareLimit(plan.n, tolerance));
    for (const row of others) {
      const at = this.profiles.offsetOf(row);
      index.add(row, this.profiles.arrayOf(row).subarray(at, at + this.profile.length));
    }
    for (const row of rows) this.compare(row, index, tolerance, mirror);
  }

  private load(block: FrameBlock, row: number): void {
    writeShape(this.plan, block.positions, row * 3 * block.atoms, this.shape, 0);
    writeProfile(this.plan, this.shape, 0, this.profile, 0);
  }

  private distance(other: number, tolerance: number, mirror: boolean) {
    const { comparer, shapes } = this;
    if (comparer.nodes > GENEROUS_NODES) comparer.nodeLimit = FRUGAL_NODE_LIMIT;
    this.matches.pairs += 1;
    const from = shapes.arrayOf(other);
    const at = shapes.offsetOf(other);
    return comparer.decide(this.shape, 0, from, at, tolerance, mirror);
  }

  /** The same frames in the same order, a little moved: no need to look further, however many are alike. */
  private matchInOrder(): boolean {
    const { own, other } = this.input;
    if (own.numbers.length !== other.numbers.length) return false;
    const rmsds: number[] = [];
    for (const row of this.open) {
      if (this.taken[row] === 1 || own.numbers[row] !== other.numbers[row]) return false;
      this.load(own.block, row);
      const near = this.distance(row, this.input.tolerance, false);
      if (near === null) return false;
      rmsds.push(near.rmsd);
    }
    this.open.forEach((row, k) => {
      this.match(row, row, rmsds[k]!, false);
    });
    this.matches.inOrder = true;
    return true;
  }

  private match(row: number, other: number, rmsd: number, mirror: boolean): void {
    this.matches.partner[row] = other;
    this.matches.rmsd[row] = rmsd;
    this.matches.how[row] = mirror ? 3 : 2;
    this.taken[other] = 1;
  }

  private compare(row: number, index: LeaderIndex, tolerance: number, mirror: boolean): void {
    this.load(this.input.own.block, row);
    for (const other of index.near(this.profile, 0)) {
      if (this.matches.pairs >= this.pairLimit) {
        // Beyond the bound only the frame at the same place is looked at.
        this.matches.complete = false;
        if (this.input.other.numbers[other] !== this.input.own.numbers[row]) continue;
      }
      const near = this.distance(other, tolerance, mirror);
      if (near) this.found.add(row, other, near.rmsd, near.mirror);
    }
  }

  private takeNearest(): void {
    const { found, matches, taken } = this;
    const { own, other } = this.input;
    const step = (k: number) => Math.round(found.rmsd[k]! * ROUNDING);
    const moved = (k: number) => (own.numbers[found.own[k]!] === other.numbers[found.other[k]!] ? 0 : 1);
    const order = Uint32Array.from({ length: found.count }, (_, k) => k);
    order.sort(
      (a, b) =>
        found.mirror[a]! - found.mirror[b]! ||
        step(a) - step(b) ||
        moved(a) - moved(b) ||
        found.own[a]! - found.own[b]! ||
        found.other[a]! - found.other[b]!,
    );
    for (const k of order) {
      const row = found.own[k]!;
      if (matches.partner[row] !== -1 || taken[found.other[k]!] === 1) continue;
      this.match(row, found.other[k]!, found.rmsd[k]!, found.mirror[k] === 1);
    }
  }

  private listShared(): void {
    const { found } = this;
    this.matches.shared.push(...nearestOf(found.count, found.own, found.other, found.rmsd));
  }

  private listSharedOther(): void {
    const { found } = this;
    this.matches.sharedOther.push(...nearestOf(found.count, found.other, found.own, found.rmsd));
  }
}

/** The nearest partner of each row that has any, by row. */
function nearestOf(count: number, rows: Int32Array, others: Int32Array, rmsds: Float64Array): SharedFrame[] {
  const nearest = new Map<number, SharedFrame>();
  for (let k = 0; k < count; k++) {
    const [row, other, rmsd] = [rows[k]!, others[k]!, rmsds[k]!];
    const before = nearest.get(row);
    if (before === undefined || rmsd < before.rmsd) nearest.set(row, { row, nearest: other, rmsd });
  }
  return [...nearest.values()].sort((a, b) => a.row - b.row);
}

function* rowsWhere(length: number, wanted: (row: number) => boolean): Generator<number> {
  for (let row = 0; row < length; row++) if (wanted(row)) yield row;
}

import type { SymmetryPlan } from "../align/plan.ts";
import { profileGap, profileLength, writeProfile, writeShape } from "../align/shape.ts";
import type { FrameBlock } from "../structure.ts";
import { principalDirections } from "./principal.ts";
import type { ShapeStore } from "./shape-store.ts";

/** Directions that candidates are told apart by: the first sorts them, all together reject most of the rest. */
export const INDEX_DIRECTIONS = 4;
/** Numbers of an entry: its place along each direction, and which leader it is. */
const ENTRY = INDEX_DIRECTIONS + 1;
/** Widths of a bin in the tolerance: finer ones follow its edges better and are more. */
const BINS_A_TOLERANCE = 4;

/** Leaders at hand from which on bins pay. */
const BINS_FROM = 256;
/** Groups of like gaps that the found are put in order by. */
const GROUPS = 32;
/** Frames whose profiles show along which directions the ensemble spreads. */
const SAMPLE = 64;

/** Directions along which the profiles of some frames, spread over the given rows, differ most; found when asked for. */
export function profileDirections(
  plan: SymmetryPlan,
  block: FrameBlock,
  rows: Int32Array,
): () => Float64Array {
  let found: Float64Array | null = null;
  return () => {
    found ??= findDirections(plan, block, rows);
    return found;
  };
}

function findDirections(plan: SymmetryPlan, block: FrameBlock, rows: Int32Array): Float64Array {
  const length = profileLength(plan);
  const count = Math.min(SAMPLE, rows.length);
  const sample = new Float64Array(count * length);
  const shape = new Float64Array(plan.shapeLength);
  for (let k = 0; k < count; k++) {
    const row = rows[Math.floor((k * rows.length) / count)]!;
    writeShape(plan, block.positions, row * 3 * block.atoms, shape, 0);
    writeProfile(plan, shape, 0, sample, k * length);
  }
  return principalDirections(sample, count, plan.n, length, 1, INDEX_DIRECTIONS);
}

/** Leaders of one bin, packed, in the order in which they came. */
interface Bin {
  entries: Float64Array;
  count: number;
  /** Entries before it have been left behind in energy. */
  from: number;
}

/**
 * Finds leaders that may lie within the RMSD tolerance of a shape. Profiles (see `writeProfile`) of such pairs differ
 * by at most a limit, and so do their projections on orthonormal directions: once leaders are many, they are kept in
 * bins along the first direction, so that most are never looked at.
 */
export class LeaderIndex {
  /** Numbers of all leaders; those before `from` have been left behind. */
  private leaders = new Int32Array(64);
  private entered = 0;
  private from = 0;
  private bins: Map<number, Bin> | null = null;
  private readonly width: number;
  private readonly reach: number;
  private readonly square: number;
  private readonly places = new Float64Array(INDEX_DIRECTIONS);
  private found = new Int32Array(64);
  private count = 0;
  /** How far apart the profiles of those found are, as `profileGap` says; and room to put them in that order. */
  private gaps = new Float64Array(64);
  private ordered = new Int32Array(64);
  private readonly starts = new Int32Array(GROUPS);

  /**
   * @param n atoms of a profile
   * @param directions rows of `n` numbers as `principalDirections` gives, at most INDEX_DIRECTIONS
   * @param profiles of the leaders, by their numbers
   * @param limit square of the largest difference of two profiles, from `squareLimit`
   * @param binsFrom leaders at hand from which on there are bins
   */
  constructor(
    private readonly n: number,
    private readonly directions: () => Float64Array,
    private readonly profiles: ShapeStore,
    private readonly limit: number,
    private readonly binsFrom = BINS_FROM,
  ) {
    // Projections round, and directions are at right angles to within rounding only.
    this.square = limit * (1 + 1e-9) + 1e-18;
    this.reach = Math.sqrt(this.square);
    this.width = this.reach / BINS_A_TOLERANCE;
  }

  /** Enters a leader, whose number is above all before. */
  add(leader: number, profile: Float64Array): void {
    if (this.entered === this.leaders.length) {
      const larger = new Int32Array(2 * this.entered);
      larger.set(this.leaders);
      this.leaders = larger;
    }
    this.leaders[this.entered++] = leader;
    if (this.bins) this.putInBin(this.bins, leader, profile, 0);
  }

  /**
   * Leaders from number `first` on whose profiles are near, ascending; valid until the next call.
   *
   * @param first never falls from call to call
   */
  near(profile: Float64Array, first: number): Int32Array {
    this.search(profile, first);
    const found = this.found.subarray(0, this.count);
    return this.bins ? found.sort() : found;
  }

  /** The same in another order: about from the nearest profile on, since a frame mostly repeats one of the nearest. */
  nearestFirst(profile: Float64Array, first: number): Int32Array {
    this.search(profile, first);
    const { count, found, gaps, starts, ordered } = this;
    const step = GROUPS / this.limit;
    starts.fill(0);
    for (let i = 0; i < count; i++) starts[groupOf(gaps[i]! * step)]! += 1;
    let from = 0;
    for (let g = 0; g < GROUPS; g++) {
      const size = starts[g]!;
      starts[g] = from;
      from += size;
    }
    for (let i = 0; i < count; i++) ordered[starts[groupOf(gaps[i]! * step)]!++] = found[i]!;
    return ordered.subarray(0, count);
  }

  private search(profile: Float64Array, first: number): void {
    while (this.from < this.entered && this.leaders[this.from]! < first) this.from += 1;
    this.count = 0;
    if (!this.bins && this.entered - this.from < this.binsFrom) {
      this.lookAtAll(profile);
      return;
    }
    this.bins ??= this.makeBins();
    this.project(profile, 0);
    const { width, reach, places } = this;
    const last = Math.floor((places[0]! + reach) / width);
    for (let key = Math.floor((places[0]! - reach) / width); key <= last; key++) {
      const bin = this.bins.get(key);
      if (bin) this.look(bin, profile, first);
    }
  }

  private lookAtAll(profile: Float64Array): void {
    const { n, limit, profiles } = this;
    this.needRoom(this.entered - this.from);
    for (let i = this.from; i < this.entered; i++) {
      const k = this.leaders[i]!;
      const gap = profileGap(n, profile, 0, profiles.arrayOf(k), profiles.offsetOf(k), limit);
      if (gap > limit) continue;
      this.gaps[this.count] = gap;
      this.found[this.count++] = k;
    }
  }

  private makeBins(): Map<number, Bin> {
    const bins = new Map<number, Bin>();
    for (let i = this.from; i < this.entered; i++) {
      const leader = this.leaders[i]!;
      this.putInBin(bins, leader, this.profiles.arrayOf(leader), this.profiles.offsetOf(leader));
    }
    return bins;
  }

  private putInBin(bins: Map<number, Bin>, leader: number, profile: Float64Array, at: number): void {
    this.project(profile, at);
    const { places } = this;
    const key = Math.floor(places[0]! / this.width);
    let bin = bins.get(key);
    if (!bin) {
      bin = { entries: new Float64Array(8 * ENTRY), count: 0, from: 0 };
      bins.set(key, bin);
    }
    const to = ENTRY * bin.count++;
    if (to === bin.entries.length) {
      const larger = new Float64Array(2 * to);
      larger.set(bin.entries);
      bin.entries = larger;
    }
    for (let d = 0; d < INDEX_DIRECTIONS; d++) bin.entries[to + d] = places[d]!;
    bin.entries[to + INDEX_DIRECTIONS] = leader;
  }

  private needRoom(more: number): void {
    if (this.count + more <= this.found.length) return;
    const larger = new Int32Array(2 * (this.count + more));
    larger.set(this.found);
    this.found = larger;
    const gaps = new Float64Array(larger.length);
    gaps.set(this.gaps);
    this.gaps = gaps;
    this.ordered = new Int32Array(larger.length);
  }

  private project(profile: Float64Array, at: number): void {
    const { n, places } = this;
    const directions = this.directions();
    for (let d = 0; d * n < directions.length; d++) {
      let sum = 0;
      for (let k = 0; k < n; k++) sum += directions[d * n + k]! * profile[at + 1 + k]!;
      places[d] = sum;
    }
  }

  private look(bin: Bin, profile: Float64Array, first: number): void {
    const { entries } = bin;
    const { n, limit, square, profiles, places } = this;
    while (bin.from < bin.count && entries[ENTRY * bin.from + INDEX_DIRECTIONS]! < first) bin.from += 1;
    this.needRoom(bin.count);
    const a = places[0]!;
    const b = places[1]!;
    const c = places[2]!;
    const d = places[3]!;
    const end = ENTRY * bin.count;
    for (let at = ENTRY * bin.from; at < end; at += ENTRY) {
      const p = entries[at]! - a;
      const q = entries[at + 1]! - b;
      const r = entries[at + 2]! - c;
      const s = entries[at + 3]! - d;
      if (p * p + q * q + r * r + s * s > square) continue;
      const k = entries[at + INDEX_DIRECTIONS]!;
      const gap = profileGap(n, profile, 0, profiles.arrayOf(k), profiles.offsetOf(k), limit);
      if (gap > limit) continue;
      this.gaps[this.count] = gap;
      this.found[this.count++] = k;
    }
  }
}

/** Which of the groups a gap falls into, from its share of the limit times their number. */
function groupOf(share: number): number {
  return Math.min(GROUPS - 1, Math.floor(share));
}

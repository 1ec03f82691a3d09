import { makePlan } from "../align/plan.ts";
import { profileLength, squareLimit, writeProfile, writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import type { AtomSet, FrameBlock, Graph } from "../structure.ts";
import { LeaderIndex, profileDirections } from "./leader-index.ts";
import { ShapeStore } from "./shape-store.ts";
import { planWalk, type SiftEnergies, type Walk } from "./walk.ts";
import { FRUGAL_NODE_LIMIT, GENEROUS_NODES } from "./work-limits.ts";

/** Pairs whose distance is remembered: some 80 MB. */
const MOST_PAIRS = 1_000_000;
/**
 * Å beyond the tolerance up to which a pair's distance is found and not only refused: the next tolerances of a moving
 * slider then need no comparison.
 */
const AHEAD = 0.05;
/**
 * Leaders near one frame, and leaders within the energy tolerance, up to which it pays to remember who is out of reach.
 * Of more of them a look into the memory costs what a comparison does.
 */
const MOST_REMEMBERED = 32;
const MOST_AT_HAND = 512;
/** Numbers of all shapes up to which they are kept: 96 MB. */
const MOST_SHAPE_NUMBERS = 12e6;

export interface CounterInput {
  graph: Graph;
  /** Accepted frames only. */
  block: FrameBlock;
  /** Frame number of each row of the block. */
  numbers: Int32Array;
  energies: SiftEnergies | null;
  atoms: AtomSet;
  symmetry: boolean;
  mirror: "merge" | "keep";
}

/** What one count asks, in kcal/mol and Å; null: no window, and RMSD alone decides. */
export interface CountQuestion {
  window: number | null;
  energyTolerance: number | null;
  rmsdTolerance: number;
}

/**
 * How many conformers a sift keeps, asked again and again while a tolerance moves: the leader sift without what only a
 * stored result needs, over profiles that are made once and distances that are found once. A count is the length of
 * `kept` of `runSift`, whatever was counted before.
 *
 * @example new ToleranceCounter(input).count({ window: null, energyTolerance: 0.15, rmsdTolerance: 0.2 }).kept
 */
export class ToleranceCounter {
  private readonly comparer: SymmetricRmsd;
  private readonly profileSize: number;
  private readonly profiles: Float64Array;
  /** By row * frames + leader's row: the RMSD in Å; below 0, a distance that it is known to exceed. */
  private readonly known = new Map<number, number>();
  /** Of each row the nearest frame that it was found to repeat, and the last one, with the RMSD in Å; -1: none. */
  private readonly mates: Int32Array;
  private readonly mateRmsd: Float64Array;
  private walk: { window: number | null; walk: Walk; directions: () => Float64Array } | null = null;
  /** Shapes of all rows, where they are few enough to be kept; else of the frame at hand and of a leader. */
  private readonly shapes: Float64Array;
  private readonly keepsShapes: boolean;

  constructor(private readonly input: CounterInput) {
    const { graph, block, atoms, symmetry } = input;
    const plan = makePlan(graph, atoms, { symmetry });
    this.comparer = new SymmetricRmsd(plan);
    this.profileSize = profileLength(plan);
    this.profiles = new Float64Array(block.count * this.profileSize);
    this.mates = new Int32Array(2 * block.count).fill(-1);
    this.mateRmsd = new Float64Array(2 * block.count);
    const size = plan.shapeLength;
    this.keepsShapes = block.count * size <= MOST_SHAPE_NUMBERS;
    this.shapes = new Float64Array(this.keepsShapes ? block.count * size : 2 * size);
    for (let row = 0; row < block.count; row++) {
      const at = this.keepsShapes ? row * size : 0;
      this.writeShape(row, at);
      writeProfile(plan, this.shapes, at, this.profiles, row * this.profileSize);
    }
  }

  /** The whole count at once. */
  count(question: CountQuestion): { kept: number; exact: boolean } {
    const run = this.begin(question);
    while (run.next());
    return run;
  }

  /** A count to be gone through in parts; one that is left alone costs nothing more. */
  begin(question: CountQuestion): CountRun {
    const { numbers, energies, block } = this.input;
    const { plan } = this.comparer;
    if (this.walk === null || this.walk.window !== question.window) {
      const walk = planWalk(numbers, energies, question.window);
      const { window } = question;
      this.walk = { window, walk, directions: profileDirections(plan, block, walk.rows) };
    }
    const { walk, directions } = this.walk;
    const limit = squareLimit(plan.n, question.rmsdTolerance);
    const profiles = new ShapeStore(this.profileSize);
    const index = new LeaderIndex(plan.n, directions, profiles, limit);
    return new CountRun(question, walk.rows, energies, index, profiles, {
      profileOf: (row) => this.profiles.subarray(row * this.profileSize, (row + 1) * this.profileSize),
      mates: this.mates,
      mateRmsd: this.mateRmsd,
      knownWithin: (row, leader, tolerance) => this.knownWithin(row, leader, tolerance),
      isWithin: (row, leader, tolerance, ahead) => this.isWithin(row, leader, tolerance, ahead),
      lastWasCut: () => this.comparer.lastWasCut,
    });
  }

  /** Whether two frames lie within the tolerance, where that was found before; null where it was not. */
  private knownWithin(row: number, leader: number, tolerance: number): boolean | null {
    const known = this.known.get(row * this.input.block.count + leader);
    if (known === undefined) return null;
    if (known >= 0) return known <= tolerance;
    return tolerance <= -known ? false : null;
  }

  /** @param ahead the distance is found beyond the tolerance too, and remembered either way */
  private isWithin(row: number, leader: number, tolerance: number, ahead: boolean): boolean {
    const { comparer, input } = this;
    if (comparer.nodes > GENEROUS_NODES) comparer.nodeLimit = FRUGAL_NODE_LIMIT;
    const reach = ahead ? tolerance + AHEAD : tolerance;
    const { shapes } = this;
    const x = this.shapeOf(row, 0);
    const y = this.shapeOf(leader, 1);
    const match = comparer.decideNear(shapes, x, shapes, y, reach, input.mirror === "merge");
    const within = match !== null && match.rmsd <= tolerance;
    if (comparer.lastWasCut) return within;
    if (within) this.keepMate(row, leader, match.rmsd);
    if (ahead) {
      if (this.known.size >= MOST_PAIRS) this.known.clear();
      this.known.set(row * input.block.count + leader, match?.rmsd ?? -reach);
    }
    return within;
  }

  /** The nearest stays, since it holds at most tolerances; any other one is the last. */
  private keepMate(row: number, mate: number, rmsd: number): void {
    const { mates, mateRmsd } = this;
    const nearest = mates[2 * row]! < 0 || rmsd <= mateRmsd[2 * row]!;
    if (nearest) {
      mates[2 * row + 1] = mates[2 * row]!;
      mateRmsd[2 * row + 1] = mateRmsd[2 * row]!;
    }
    mates[2 * row + Number(!nearest)] = mate;
    mateRmsd[2 * row + Number(!nearest)] = rmsd;
  }

  /** Where the shape of a frame begins; it is written into the given place when shapes are not kept. */
  private shapeOf(row: number, place: 0 | 1): number {
    const size = this.comparer.plan.shapeLength;
    if (this.keepsShapes) return row * size;
    this.writeShape(row, place * size);
    return place * size;
  }

  private writeShape(row: number, at: number): void {
    const { positions, atoms } = this.input.block;
    writeShape(this.comparer.plan, positions, row * 3 * atoms, this.shapes, at);
  }
}

/** What a count asks of the counter that began it. */
interface Pairs {
  profileOf(row: number): Float64Array;
  /** Two of each row; see the counter. */
  readonly mates: Int32Array;
  readonly mateRmsd: Float64Array;
  knownWithin(row: number, leader: number, tolerance: number): boolean | null;
  isWithin(row: number, leader: number, tolerance: number, ahead: boolean): boolean;
  lastWasCut(): boolean;
}

/** One count under way. */
export class CountRun {
  /** Rows of the frames that lead. */
  private readonly leaders: number[] = [];
  /** By row: which leader it is, from 1; 0: none. */
  private readonly leads: Int32Array;
  /** First leader still within the energy tolerance: rises along the walk. */
  private first = 0;
  private step = 0;
  /** False where a comparison met the bound on its work: the count may then be too large. */
  exact = true;

  constructor(
    private readonly question: CountQuestion,
    private readonly rows: Int32Array,
    private readonly energies: SiftEnergies | null,
    private readonly index: LeaderIndex,
    private readonly profiles: ShapeStore,
    private readonly pairs: Pairs,
  ) {
    this.leads = new Int32Array(pairs.mates.length / 2);
  }

  get kept(): number {
    return this.leaders.length;
  }

  /** 0 to 1. */
  get done(): number {
    return this.rows.length === 0 ? 1 : this.step / this.rows.length;
  }

  /** Takes the next frame; false where there is none left. */
  next(): boolean {
    if (this.step >= this.rows.length) return false;
    const row = this.rows[this.step++]!;
    this.passLeaders(row);
    if (this.followsMate(row)) return true;
    const profile = this.pairs.profileOf(row);
    if (this.repeats(row, this.index.nearestFirst(profile, this.first))) return true;
    const number = this.leaders.push(row);
    this.leads[row] = number;
    this.index.add(number - 1, profile);
    this.profiles.push(profile);
    return true;
  }

  /** Whether a frame that this one was found to repeat leads here, too, and lies within both tolerances. */
  private followsMate(row: number): boolean {
    const { mates, mateRmsd } = this.pairs;
    for (let at = 2 * row; at < 2 * row + 2; at++) {
      const mate = mates[at]!;
      if (mate < 0 || mateRmsd[at]! > this.question.rmsdTolerance) continue;
      if (this.leads[mate]! > this.first) return true;
    }
    return false;
  }

  private repeats(row: number, near: Int32Array): boolean {
    const { pairs, leaders } = this;
    if (near.length > MOST_REMEMBERED || leaders.length - this.first > MOST_AT_HAND)
      return this.repeatsAnyOf(row, near);
    const { rmsdTolerance } = this.question;
    // What is known goes first: one leader that the frame repeats is enough.
    let open = 0;
    for (let i = 0; i < near.length; i++) {
      const known = pairs.knownWithin(row, leaders[near[i]!]!, rmsdTolerance);
      if (known === true) return true;
      if (known === null) near[open++] = near[i]!;
    }
    for (let i = 0; i < open; i++) {
      if (pairs.isWithin(row, leaders[near[i]!]!, rmsdTolerance, true)) return true;
      if (pairs.lastWasCut()) this.exact = false;
    }
    return false;
  }

  private repeatsAnyOf(row: number, near: Int32Array): boolean {
    const { pairs, leaders } = this;
    for (let i = 0; i < near.length; i++) {
      if (pairs.isWithin(row, leaders[near[i]!]!, this.question.rmsdTolerance, false)) return true;
      if (pairs.lastWasCut()) this.exact = false;
    }
    return false;
  }

  private passLeaders(row: number): void {
    const { energies, question, leaders } = this;
    const tolerance = question.energyTolerance;
    if (!energies || tolerance === null) return;
    const { values, kcalPerUnit } = energies;
    while (
      this.first < leaders.length &&
      (values[row]! - values[leaders[this.first]!]!) * kcalPerUnit > tolerance
    ) {
      this.first += 1;
    }
    this.profiles.release(this.first);
  }
}

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
  private walk: { window: number | null; walk: Walk; directions: () => Float64Array } | null = null;
  /** Shapes by row, where they are few enough to be kept; else of the frame at hand and of a leader. */
  private readonly shapes: (Float64Array | undefined)[] = [];
  private readonly keepsShapes: boolean;
  private readonly frame: Float64Array;
  private readonly leader: Float64Array;

  constructor(private readonly input: CounterInput) {
    const { graph, block, atoms, symmetry } = input;
    const plan = makePlan(graph, atoms, { symmetry });
    this.comparer = new SymmetricRmsd(plan);
    this.profileSize = profileLength(plan);
    this.profiles = new Float64Array(block.count * this.profileSize);
    this.frame = new Float64Array(plan.shapeLength);
    this.leader = new Float64Array(plan.shapeLength);
    this.keepsShapes = block.count * plan.shapeLength <= MOST_SHAPE_NUMBERS;
    for (let row = 0; row < block.count; row++) {
      writeProfile(plan, this.writeShape(row, this.frame), 0, this.profiles, row * this.profileSize);
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
      knownWithin: (row, leader, tolerance) => this.knownWithin(row, leader, tolerance),
      isWithin: (row, leader, tolerance) => this.isWithin(row, leader, tolerance),
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

  private isWithin(row: number, leader: number, tolerance: number): boolean {
    const { comparer, input } = this;
    if (comparer.nodes > GENEROUS_NODES) comparer.nodeLimit = FRUGAL_NODE_LIMIT;
    const reach = tolerance + AHEAD;
    const x = this.shapeOf(row, this.frame);
    const y = this.shapeOf(leader, this.leader);
    const match = comparer.decideNear(x, 0, y, 0, reach, input.mirror === "merge");
    if (!comparer.lastWasCut) {
      if (this.known.size >= MOST_PAIRS) this.known.clear();
      this.known.set(row * input.block.count + leader, match?.rmsd ?? -reach);
    }
    return match !== null && match.rmsd <= tolerance;
  }

  /** The shape of a frame; `room` is where it is written when shapes are not kept. */
  private shapeOf(row: number, room: Float64Array): Float64Array {
    if (!this.keepsShapes) return this.writeShape(row, room);
    const kept = this.shapes[row];
    if (kept !== undefined) return kept;
    const made = this.writeShape(row, new Float64Array(room.length));
    this.shapes[row] = made;
    return made;
  }

  private writeShape(row: number, shape: Float64Array): Float64Array {
    const { positions, atoms } = this.input.block;
    writeShape(this.comparer.plan, positions, row * 3 * atoms, shape, 0);
    return shape;
  }
}

/** What a count asks of the counter that began it. */
interface Pairs {
  profileOf(row: number): Float64Array;
  knownWithin(row: number, leader: number, tolerance: number): boolean | null;
  isWithin(row: number, leader: number, tolerance: number): boolean;
  lastWasCut(): boolean;
}

/** One count under way. */
export class CountRun {
  /** Rows of the frames that lead. */
  private readonly leaders: number[] = [];
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
  ) {}

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
    const profile = this.pairs.profileOf(row);
    if (this.repeats(row, this.index.near(profile, this.first))) return true;
    this.index.add(this.leaders.push(row) - 1, profile);
    this.profiles.push(profile);
    return true;
  }

  /** What is known goes first: one leader that the frame repeats is enough. */
  private repeats(row: number, near: Int32Array): boolean {
    const { pairs, leaders } = this;
    const { rmsdTolerance } = this.question;
    let open = 0;
    for (let i = 0; i < near.length; i++) {
      const known = pairs.knownWithin(row, leaders[near[i]!]!, rmsdTolerance);
      if (known === true) return true;
      if (known === null) near[open++] = near[i]!;
    }
    // From the nearest in energy: there a frame mostly finds what it repeats.
    for (let i = open - 1; i >= 0; i--) {
      if (pairs.isWithin(row, leaders[near[i]!]!, rmsdTolerance)) return true;
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

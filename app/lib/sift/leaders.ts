import type { SymmetryPlan } from "../align/plan.ts";
import { profileLength, squareLimit, writeProfile, writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import { SymmetryNumber } from "../align/symmetry-number.ts";
import type { FrameBlock } from "../structure.ts";
import { SiftCancelled, type SiftHooks } from "./hooks.ts";
import { LeaderIndex, profileDirections } from "./leader-index.ts";
import { ShapeStore } from "./shape-store.ts";
import type { SiftEnergies, Walk } from "./walk.ts";
import { FRUGAL_NODE_LIMIT, GENEROUS_NODES, GENEROUS_SYMMETRY_NODES } from "./work-limits.ts";

export interface LeaderRule {
  /** kcal/mol; null: any. */
  energyTolerance: number | null;
  /** Å. */
  rmsdTolerance: number;
  /** Mirror images count as the same conformer. */
  mergeMirror: boolean;
}

export interface Leader {
  row: number;
  /** Index in the walk. */
  step: number;
  mirrorRmsd: number;
  symmetryNumber: number | null;
  /** Frames that show it, itself included. */
  found: number;
  exact: boolean;
}

export interface Follower {
  row: number;
  step: number;
  /** Index among the leaders. */
  leader: number;
  rmsd: number;
  mirror: boolean;
  exact: boolean;
}

export interface Leaders {
  leaders: Leader[];
  followers: Follower[];
  /** Pairs whose geometry was compared, by bounds (some of many pairs at once) or in full. */
  pairs: number;
}

/**
 * The distinct set by leaders: a frame repeats the first leader, in the order of the walk, that lies within both
 * tolerances of it; else it leads itself. Frames are compared with leaders only.
 *
 * @param plan of the compared atoms; @param whole of all atoms, for symmetry numbers
 * @throws SiftCancelled when the hook says so
 */
export function findLeaders(
  block: FrameBlock,
  walk: Walk,
  energies: SiftEnergies | null,
  plan: SymmetryPlan,
  whole: SymmetryPlan,
  rule: LeaderRule,
  hooks: SiftHooks = {},
): Leaders {
  return new LeaderWalk(block, walk, energies, plan, whole, rule, hooks).run();
}

class LeaderWalk {
  private readonly comparer: SymmetricRmsd;
  private readonly symmetry: SymmetryNumber;
  private readonly index: LeaderIndex;
  private readonly store: ShapeStore;
  private readonly profiles: ShapeStore;
  private readonly shape: Float64Array;
  private readonly profile: Float64Array;
  private readonly wholeShape: Float64Array;
  private readonly result: Leaders = { leaders: [], followers: [], pairs: 0 };
  /** First leader still within the energy tolerance: rises along the walk. */
  private first = 0;

  constructor(
    private readonly block: FrameBlock,
    private readonly walk: Walk,
    private readonly energies: SiftEnergies | null,
    plan: SymmetryPlan,
    whole: SymmetryPlan,
    private readonly rule: LeaderRule,
    private readonly hooks: SiftHooks,
  ) {
    this.comparer = new SymmetricRmsd(plan);
    this.symmetry = new SymmetryNumber(whole);
    this.comparer.interrupt = () => this.look();
    this.symmetry.interrupt = () => this.look();
    this.store = new ShapeStore(plan.shapeLength);
    this.shape = new Float64Array(plan.shapeLength);
    this.profile = new Float64Array(profileLength(plan));
    this.wholeShape = new Float64Array(whole.shapeLength);
    this.profiles = new ShapeStore(profileLength(plan));
    const limit = squareLimit(plan.n, rule.rmsdTolerance);
    this.index = new LeaderIndex(plan.n, profileDirections(plan, block, walk.rows), this.profiles, limit);
  }

  run(): Leaders {
    const { rows } = this.walk;
    let shown = -1;
    for (let step = 0; step < rows.length; step++) {
      this.look();
      const percent = Math.floor((100 * step) / rows.length);
      if (percent !== shown) this.hooks.progress?.(step / rows.length, this.result.pairs);
      shown = percent;
      this.take(step);
    }
    this.hooks.progress?.(1, this.result.pairs);
    return this.result;
  }

  private look(): void {
    if (this.hooks.cancelled?.()) throw new SiftCancelled();
  }

  /** Writes shape and profile of a frame. */
  private load(row: number): void {
    const { plan } = this.comparer;
    writeShape(plan, this.block.positions, row * 3 * this.block.atoms, this.shape, 0);
    writeProfile(plan, this.shape, 0, this.profile, 0);
  }

  private take(step: number): void {
    const { comparer, store, rule } = this;
    const { plan } = comparer;
    const row = this.walk.rows[step]!;
    this.load(row);
    this.passLeaders(row);
    if (comparer.nodes > GENEROUS_NODES) comparer.nodeLimit = FRUGAL_NODE_LIMIT;
    const { leaders, followers } = this.result;
    const near = this.index.near(this.profile, this.first);
    let exact = true;
    for (let i = 0; i < near.length; i++) {
      const k = near[i]!;
      this.look();
      const match = comparer.decideNear(
        this.shape,
        0,
        store.arrayOf(k),
        store.offsetOf(k),
        rule.rmsdTolerance,
        rule.mergeMirror,
      );
      if (match) {
        const { rmsd, mirror } = match;
        followers.push({ row, step, leader: k, rmsd, mirror, exact: exact && match.exact });
        leaders[k]!.found += 1;
        this.result.pairs += k + 1 - this.first;
        return;
      }
      if (comparer.lastWasCut) exact = false;
    }
    this.result.pairs += leaders.length - this.first;
    this.lead(row, step, exact && plan.chain.complete);
  }

  /** Moves `first` past the leaders that lie too far below in energy; energies rise, so it never moves back. */
  private passLeaders(row: number): void {
    const tolerance = this.rule.energyTolerance;
    if (!this.energies || tolerance === null) return;
    const { values, kcalPerUnit } = this.energies;
    const leaders = this.result.leaders;
    while (
      this.first < leaders.length &&
      (values[row]! - values[leaders[this.first]!.row]!) * kcalPerUnit > tolerance
    ) {
      this.first += 1;
    }
    this.store.release(this.first);
    this.profiles.release(this.first);
  }

  private lead(row: number, step: number, exact: boolean): void {
    const { block, symmetry } = this;
    this.index.add(this.result.leaders.length, this.profile);
    this.profiles.push(this.profile);
    this.store.push(this.shape);
    const toMirror = this.comparer.toOwnMirror(this.shape, 0);
    if (symmetry.nodes > GENEROUS_SYMMETRY_NODES) symmetry.nodeLimit = FRUGAL_NODE_LIMIT;
    writeShape(symmetry.plan, block.positions, row * 3 * block.atoms, this.wholeShape, 0);
    this.result.leaders.push({
      row,
      step,
      mirrorRmsd: toMirror.rmsd,
      symmetryNumber: symmetry.count(this.wholeShape, 0),
      found: 1,
      exact: exact && toMirror.exact,
    });
  }
}

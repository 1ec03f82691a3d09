import { makePlan } from "../align/plan.ts";
import { profileLength, squareLimit, writeProfile, writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import type { AtomSet, FrameBlock, Graph } from "../structure.ts";
import { SiftCancelled, type SiftHooks } from "./hooks.ts";
import { LeaderIndex, profileDirections } from "./leader-index.ts";
import { ShapeStore } from "./shape-store.ts";
import { planWalk, type SiftEnergies, type Walk } from "./walk.ts";
import { FRUGAL_NODE_LIMIT, GENEROUS_NODES } from "./work-limits.ts";

/** Tolerances that one call takes. */
export const MAX_TOLERANCES = 12;
const MAX_FACTORS = 3;

export interface ToleranceCounts {
  /** Å, rising: those asked for. */
  rmsdTolerances: number[];
  /** Multiples of the energy tolerance, rising; [1] where there is none. */
  energyFactors: number[];
  /** counts[f][t]: kept conformers at energy factor f and RMSD tolerance t. */
  counts: number[][];
  /** False where a comparison met the bound on its work: that count may then be too large. */
  exact: boolean;
}

export interface ToleranceInput {
  graph: Graph;
  /** Accepted frames only. */
  block: FrameBlock;
  /** Frame number of each row of the block. */
  numbers: Int32Array;
  energies: SiftEnergies | null;
  /** What the counts have in common. */
  recipe: {
    window: number | null;
    /** kcal/mol; null: RMSD alone decides. */
    energyTolerance: number | null;
    atoms: AtomSet;
    symmetry: boolean;
    mirror: "merge" | "keep";
  };
  /** Å, at most 12. */
  rmsdTolerances: readonly number[];
  /** Multiples of the energy tolerance, at most 3; [1] when left out. */
  energyFactors?: readonly number[];
}

/**
 * How many conformers a sift would keep at each of several tolerances: as many leader sifts, run side by side over the
 * same walk. Each frame is compared with what leads in any of them, at the largest tolerance first; the RMSD found
 * then settles all others, so that together they cost little more than the widest.
 *
 * @returns tolerances in rising order with `kept.length` of `runSift` at each
 * @throws SiftCancelled when `hooks.cancelled` says so
 * @throws RangeError on more tolerances or factors than one call takes, or one that is below 0 or no number
 * @example countAgainstTolerance({ graph, block, numbers, energies, recipe, rmsdTolerances: [0.1, 0.2, 0.4] }).counts[0]
 */
export function countAgainstTolerance(input: ToleranceInput, hooks: SiftHooks = {}): ToleranceCounts {
  return beginCounts(input, hooks).run();
}

/** The same, to be gone through in parts: `next` until it is false, then `result`. */
export function beginCounts(input: ToleranceInput, hooks: SiftHooks = {}): ToleranceWalk {
  const rmsdTolerances = rising(input.rmsdTolerances, MAX_TOLERANCES, "RMSD tolerances");
  const withEnergy = input.energies !== null && input.recipe.energyTolerance !== null;
  const asked = rising(input.energyFactors ?? [1], MAX_FACTORS, "energy factors");
  const energyFactors = withEnergy ? asked : [1];
  return new ToleranceWalk(input, rmsdTolerances, energyFactors, hooks);
}

function rising(values: readonly number[], most: number, what: string): number[] {
  const sorted = [...new Set(values)].sort((a, b) => a - b);
  if (sorted.length === 0 || sorted.length > most || !sorted.every((v) => v >= 0 && Number.isFinite(v))) {
    throw new RangeError(`From 1 to ${most} ${what}, none below 0, are needed; found ${values.join(", ")}.`);
  }
  return sorted;
}

/** Sifts at `factors` x `tolerances`. A set of tolerances is a number, bit t for tolerance t. */
export class ToleranceWalk {
  private readonly walk: Walk;
  private readonly comparer: SymmetricRmsd;
  private readonly store: ShapeStore;
  private readonly profiles: ShapeStore;
  private readonly shape: Float64Array;
  private readonly profile: Float64Array;
  /** For each tolerance, the frames that lead there at any factor. */
  private readonly indexes: LeaderIndex[];
  /** Rows of the frames that lead in any sift, and the step at which each was last compared. */
  private readonly rows: number[] = [];
  private readonly seen: number[] = [];
  /** For each factor: the tolerances at which each of them leads; the first within the energy tolerance. */
  private readonly leads: number[][];
  private readonly first: number[];
  /** For each factor: the tolerances at which the frame at hand repeats nothing yet. */
  private readonly open: number[];
  private readonly counts: number[][];
  private exact: boolean;
  private step = 0;
  private shown = -1;

  constructor(
    private readonly input: ToleranceInput,
    private readonly tolerances: number[],
    private readonly factors: number[],
    private readonly hooks: SiftHooks,
  ) {
    const { graph, recipe, block, numbers, energies } = input;
    const plan = makePlan(graph, recipe.atoms, { symmetry: recipe.symmetry });
    this.walk = planWalk(numbers, energies, recipe.window);
    this.comparer = new SymmetricRmsd(plan);
    this.comparer.interrupt = () => this.look();
    this.store = new ShapeStore(plan.shapeLength);
    this.profiles = new ShapeStore(profileLength(plan));
    this.shape = new Float64Array(plan.shapeLength);
    this.profile = new Float64Array(profileLength(plan));
    const directions = profileDirections(plan, block, this.walk.rows);
    this.indexes = tolerances.map(
      (tolerance) => new LeaderIndex(plan.n, directions, this.profiles, squareLimit(plan.n, tolerance)),
    );
    this.leads = factors.map(() => []);
    this.first = factors.map(() => 0);
    this.open = factors.map(() => 0);
    this.counts = factors.map(() => tolerances.map(() => 0));
    this.exact = plan.chain.complete;
  }

  run(): ToleranceCounts {
    while (this.next());
    this.hooks.progress?.(1);
    return this.result;
  }

  /** Takes the next frame; false where there is none left. */
  next(): boolean {
    const { rows } = this.walk;
    const { step } = this;
    if (step >= rows.length) return false;
    this.look();
    const percent = Math.floor((100 * step) / rows.length);
    if (percent !== this.shown) this.hooks.progress?.(step / rows.length);
    this.shown = percent;
    this.take(rows[step]!, step);
    this.step = step + 1;
    return true;
  }

  /** 0 to 1. */
  get done(): number {
    return this.walk.rows.length === 0 ? 1 : this.step / this.walk.rows.length;
  }

  /** What was counted so far. */
  get result(): ToleranceCounts {
    return {
      rmsdTolerances: this.tolerances,
      energyFactors: this.factors,
      counts: this.counts,
      exact: this.exact,
    };
  }

  private look(): void {
    if (this.hooks.cancelled?.()) throw new SiftCancelled();
  }

  private take(row: number, step: number): void {
    const { comparer, tolerances, open, input } = this;
    const { plan } = comparer;
    writeShape(plan, input.block.positions, row * 3 * input.block.atoms, this.shape, 0);
    writeProfile(plan, this.shape, 0, this.profile, 0);
    this.passLeaders(row);
    if (comparer.nodes > GENEROUS_NODES) comparer.nodeLimit = FRUGAL_NODE_LIMIT;
    const widest = this.first[this.first.length - 1]!;
    open.fill(2 ** tolerances.length - 1);
    for (let t = tolerances.length - 1; t >= 0; t--) {
      if (this.isSettled(t)) continue;
      const near = this.indexes[t]!.nearestFirst(this.profile, widest);
      for (let i = 0; i < near.length && !this.isSettled(t); i++) this.meet(near[i]!, t, step);
    }
    if (open.some((set) => set !== 0)) this.lead(row);
  }

  /** True where the frame at hand repeats a leader at tolerance t, whatever the energy factor. */
  private isSettled(t: number): boolean {
    const { open } = this;
    for (let f = 0; f < open.length; f++) if ((open[f]! >> t) & 1) return false;
    return true;
  }

  /** Compares the frame at hand with a leader, unless that was done at a larger tolerance or settles nothing. */
  private meet(leader: number, t: number, step: number): void {
    if (this.seen[leader] === step || !this.matters(leader, t)) return;
    const { comparer, store, tolerances, factors, open } = this;
    this.look();
    this.seen[leader] = step;
    const match = comparer.decideNear(
      this.shape,
      0,
      store.arrayOf(leader),
      store.offsetOf(leader),
      tolerances[t]!,
      this.input.recipe.mirror === "merge",
    );
    if (comparer.lastWasCut) this.exact = false;
    if (!match) return;
    let least = t;
    while (least > 0 && match.rmsd <= tolerances[least - 1]!) least -= 1;
    const below = 2 ** least - 1;
    for (let f = 0; f < factors.length; f++) {
      if (leader >= this.first[f]!) open[f] = open[f]! & (below | ~this.leads[f]![leader]!);
    }
  }

  /** True where a leader leads in a sift at tolerance t that is not settled. */
  private matters(leader: number, t: number): boolean {
    for (let f = 0; f < this.factors.length; f++) {
      if (leader >= this.first[f]! && ((this.open[f]! & this.leads[f]![leader]!) >> t) & 1) return true;
    }
    return false;
  }

  private passLeaders(row: number): void {
    const { energies, recipe } = this.input;
    if (!energies || recipe.energyTolerance === null) return;
    const { values, kcalPerUnit } = energies;
    for (let f = 0; f < this.factors.length; f++) {
      const tolerance = recipe.energyTolerance * this.factors[f]!;
      let k = this.first[f]!;
      while (k < this.rows.length && (values[row]! - values[this.rows[k]!]!) * kcalPerUnit > tolerance)
        k += 1;
      this.first[f] = k;
    }
    const widest = this.first[this.first.length - 1]!;
    this.store.release(widest);
    this.profiles.release(widest);
  }

  private lead(row: number): void {
    const leader = this.rows.push(row) - 1;
    this.seen.push(-1);
    this.store.push(this.shape);
    this.profiles.push(this.profile);
    let anywhere = 0;
    for (let f = 0; f < this.factors.length; f++) {
      const set = this.open[f]!;
      this.leads[f]!.push(set);
      anywhere |= set;
      for (let t = 0; t < this.tolerances.length; t++) this.counts[f]![t]! += (set >> t) & 1;
    }
    for (let t = 0; t < this.tolerances.length; t++) {
      if ((anywhere >> t) & 1) this.indexes[t]!.add(leader, this.profile);
    }
  }
}

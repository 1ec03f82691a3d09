import { fromLowest } from "../levels/compare.ts";
import { narrowestWindow, nextWindow, windowCurve } from "../levels/window.ts";
import { GENERATOR_NAME, generator } from "../stats/random.ts";
import { type DrawnFigure, type DrawRecipe, summariseDraws } from "../trust/drawn-figures.ts";
import { thermalEnergyKcal } from "../units.ts";
import { hoursEach } from "./hours.ts";
import type { Plan } from "./plan.ts";

/** The conformers that a plan starts from. */
export interface PlanData {
  /** Energies of the start and of each step's level where they are known, kcal/mol, any zero, by conformer. */
  start: ArrayLike<number>;
  /** One a step; null where the level has no energies yet. */
  known: readonly (ArrayLike<number> | null)[];
  weights: ArrayLike<number>;
  /** Of the molecule: for the size scaling. */
  atoms: number;
}

export interface StepOutcome {
  /** Candidates, and those computed at this level: mean and 95 % range over the draws. */
  in: DrawnFigure;
  carried: DrawnFigure;
  /** Window at the level before, kcal/mol; null for all. */
  windowKcal: number | null;
  /** Window that would take in one conformer more there; Infinity where none is left. */
  nextKcal: number;
  hoursEach: number;
  exponent: number | null;
  exponentFitted: boolean;
  /** Core hours with the repeats, for the mean number carried. */
  cost: number;
  /** Hours of waiting, the jobs in as many rounds as the slots need. */
  wall: number;
  /** Share of the final population that is still carried after this cut. */
  kept: DrawnFigure;
}

export interface PlanOutcome extends DrawRecipe {
  steps: StepOutcome[];
  cost: number;
  wall: number;
  /** Share of the final population that reaches the last level, fraction. */
  kept: DrawnFigure;
  /** Share of the draws in which the truly lowest conformer reaches the last level. */
  lowestKept: number;
}

/**
 * What a plan keeps and costs.
 *
 * Each draw gives true energies to the last level (known ones, or those of the level before plus a normal error a
 * conformer), cuts in order of work, each window measured from the lowest that was computed at that level, and adds up
 * the final population of those left. Draws come in antithetic pairs. Step k costs n_k t_k (1 + f); it waits
 * ceil(n_k/slots) t_k (1 + f)/cores.
 *
 * @throws RangeError without a conformer, or where lists differ in length
 * @example evaluatePlan(plan, data).kept.mean // 0.951
 */
export function evaluatePlan(plan: Plan, data: PlanData): PlanOutcome {
  const n = data.start.length;
  if (n === 0) throw new RangeError("No conformer to plan for.");
  if (data.known.length !== plan.steps.length) {
    throw new RangeError(`${plan.steps.length} steps, but energies for ${data.known.length}.`);
  }
  for (const list of [data.weights, ...data.known]) {
    if (list !== null && list.length !== n) throw new RangeError(`${n} conformers against ${list.length}.`);
  }
  const windows = resolveCuts(plan, data);
  const before = expectedChain(data);
  const steps = plan.steps.length;
  const record = () => Array.from({ length: steps }, () => new Float64Array(plan.draws));
  const ins = record();
  const carried = record();
  const kept = record();
  let lowestKept = 0;
  drawChains(plan, data, (chain, q, lowest, draw) => {
    let inside = new Uint8Array(n).fill(1);
    for (let s = 0; s < steps; s++) {
      ins[s]![draw] = count(inside);
      inside = cutBy(chain[s]!, inside, windows[s]!);
      carried[s]![draw] = count(inside);
      let sum = 0;
      for (let i = 0; i < n; i++) if (inside[i] === 1) sum += q[i]!;
      kept[s]![draw] = Math.min(1, sum);
    }
    if (inside[lowest] === 1) lowestKept++;
  });
  const outcome = plan.steps.map((step, s): StepOutcome => {
    const each = hoursEach(step.hours, data.atoms);
    const number = summariseDraws(carried[s]!);
    const again = 1 + plan.failRate;
    return {
      in: summariseDraws(ins[s]!),
      carried: number,
      windowKcal: windows[s]!,
      nextKcal: nextWindow(windowCurve(before[s]!, data.weights), windows[s] ?? Number.POSITIVE_INFINITY),
      hoursEach: each.hours,
      exponent: each.exponent,
      exponentFitted: each.fitted,
      cost: number.mean * each.hours * again,
      wall: (Math.ceil(Math.round(number.mean) / plan.slots) * each.hours * again) / plan.coresPerSlot,
      kept: summariseDraws(kept[s]!),
    };
  });
  return {
    steps: outcome,
    cost: outcome.reduce((sum, step) => sum + step.cost, 0),
    wall: outcome.reduce((sum, step) => sum + step.wall, 0),
    kept: outcome.at(-1)!.kept,
    lowestKept: lowestKept / plan.draws,
    draws: plan.draws,
    seed: plan.seed,
    generator: GENERATOR_NAME,
  };
}

/** Final population of each conformer, the mean over the draws: what cuts by share are read off from. */
export function meanFinalPopulation(plan: Plan, data: PlanData): Float64Array {
  const mean = new Float64Array(data.start.length);
  drawChains(plan, data, (_chain, q) => {
    for (let i = 0; i < mean.length; i++) mean[i] = mean[i]! + q[i]! / plan.draws;
  });
  return mean;
}

/**
 * Windows of the cuts, kcal/mol: a cut by share takes the narrowest window that keeps that share of the mean final
 * population; null carries all.
 */
export function resolveCuts(plan: Plan, data: PlanData): (number | null)[] {
  const byShare = plan.steps.some((step) => step.cut.by === "share");
  const population = byShare ? meanFinalPopulation(plan, data) : null;
  const before = expectedChain(data);
  return plan.steps.map(({ cut }, s) => {
    if (cut.by === "window") return cut.kcal;
    if (cut.by === "all" || population === null) return null;
    return narrowestWindow(windowCurve(before[s]!, population), cut.share).kcal;
  });
}

/** Energies before each step without errors: of a predicted level those of the one before it. */
function expectedChain(data: PlanData): ArrayLike<number>[] {
  const chain: ArrayLike<number>[] = [data.start];
  for (const known of data.known) chain.push(known ?? chain.at(-1)!);
  return chain;
}

/**
 * Draws the energies before each step and the final populations.
 *
 * @param visit energies before step 1, 2, ...; final populations; place of the truly lowest conformer; number of the draw
 */
function drawChains(
  plan: Plan,
  data: PlanData,
  visit: (chain: readonly Float64Array[], q: Float64Array, lowest: number, draw: number) => void,
): void {
  const n = data.start.length;
  const rt = thermalEnergyKcal(plan.temperatureK);
  const { normal } = generator(plan.seed);
  const expected = expectedChain(data).map(fromLowest);
  // Errors of the predicted levels, then that of the last level against the truth.
  const sigmas = [...plan.steps.map((step, s) => (data.known[s] === null ? step.sigma : 0)), plan.truthSigma];
  const errors = sigmas.map(() => new Float64Array(n));
  const chain = expected.map(() => new Float64Array(n));
  const truth = new Float64Array(n);
  const q = new Float64Array(n);
  const logWeights = Float64Array.from(data.weights, Math.log);
  for (let draw = 0; draw < plan.draws; draw++) {
    const sign = draw % 2 === 0 ? 1 : -1;
    if (sign === 1) for (const error of errors) for (let i = 0; i < n; i++) error[i] = normal();
    chain[0]!.set(expected[0]!);
    for (let s = 0; s < plan.steps.length; s++) {
      const known = data.known[s] !== null;
      const from = known ? expected[s + 1]! : chain[s]!;
      for (let i = 0; i < n; i++) chain[s + 1]![i] = from[i]! + sign * sigmas[s]! * errors[s]![i]!;
    }
    const last = chain.at(-1)!;
    let lowest = 0;
    for (let i = 0; i < n; i++) {
      truth[i] = last[i]! + sign * plan.truthSigma * errors.at(-1)![i]!;
      if (truth[i]! < truth[lowest]!) lowest = i;
    }
    weighInto(truth, logWeights, rt, q);
    visit(chain, q, lowest, draw);
  }
}

function weighInto(energies: Float64Array, logWeights: Float64Array, rt: number, out: Float64Array): void {
  let top = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < energies.length; i++) {
    out[i] = logWeights[i]! - energies[i]! / rt;
    if (out[i]! > top) top = out[i]!;
  }
  let total = 0;
  for (let i = 0; i < energies.length; i++) {
    out[i] = Math.exp(out[i]! - top);
    total += out[i]!;
  }
  for (let i = 0; i < energies.length; i++) out[i] = out[i]! / total;
}

/** Who of those inside lies within the window of the lowest of them. */
function cutBy(energies: Float64Array, inside: Uint8Array<ArrayBuffer>, windowKcal: number | null) {
  if (windowKcal === null) return inside.slice();
  let lowest = Number.POSITIVE_INFINITY;
  for (let i = 0; i < energies.length; i++) {
    if (inside[i] === 1 && energies[i]! < lowest) lowest = energies[i]!;
  }
  // A window that was read off as a difference must hold the conformer that it was read off from.
  return inside.map((one, i) => (one === 1 && energies[i]! - lowest <= windowKcal + 1e-9 ? 1 : 0));
}

function count(inside: Uint8Array): number {
  let total = 0;
  for (let i = 0; i < inside.length; i++) total += inside[i]!;
  return total;
}

import { makePlan } from "../align/plan.ts";
import type { SiftHooks } from "../sift/hooks.ts";
import { findLeaders, type Leader, type Leaders } from "../sift/leaders.ts";
import { planWalk, type SiftEnergies, type Walk } from "../sift/walk.ts";
import type { FrameBlock, Graph } from "../structure.ts";
import type { SiftRecipe } from "./recipe.ts";
import type { DroppedFrame, KeptConformer, SiftResult } from "./result.ts";

export { SiftCancelled, type SiftHooks } from "../sift/hooks.ts";

/** All that a sift depends on; worker, browser and bench hand over the same. */
export interface SiftInput {
  graph: Graph;
  /** Accepted frames only. */
  block: FrameBlock;
  /** Frame number of each row of the block. */
  numbers: Int32Array;
  /** In their own unit as written; null with a recipe whose level is null. */
  energies: SiftEnergies | null;
  recipe: SiftRecipe;
}

/**
 * Reduces frames to the distinct set as a recipe says: leaders from the lowest energy. Same input, same digits.
 *
 * @returns `kept` in the order of the walk (rising energy, then frame number; by frame number without energies), all
 *   other lists by frame number; held frames are the caller's to add
 * @throws SiftCancelled when `hooks.cancelled` says so
 * @throws RangeError when the parts of the input do not fit each other
 * @example runSift({ graph, block, numbers, energies, recipe }).kept.length
 */
export function runSift(input: SiftInput, hooks: SiftHooks = {}): Omit<SiftResult, "held"> {
  const started = hooks.now?.() ?? 0;
  check(input);
  const { graph, block, numbers, recipe } = input;
  const energies = recipe.level === null ? null : input.energies;
  const walk = planWalk(numbers, energies, recipe.window);
  const whole = makePlan(graph, "all");
  const plan =
    recipe.symmetry && recipe.atoms === "all"
      ? whole
      : makePlan(graph, recipe.atoms, { symmetry: recipe.symmetry });
  const rule = {
    energyTolerance: recipe.energyTolerance,
    rmsdTolerance: recipe.rmsdTolerance,
    mergeMirror: recipe.mirror === "merge",
  };
  const leaders = findLeaders(block, walk, energies, plan, whole, rule, hooks);
  return {
    kept: keptConformers(leaders.leaders, numbers, walk, recipe),
    dropped: droppedFrames(leaders, input, energies),
    outsideWindow: Array.from(walk.outside, (row) => numbers[row]!),
    withoutEnergy: Array.from(walk.withoutEnergy, (row) => numbers[row]!),
    pairsExamined: leaders.pairs,
    seconds: ((hooks.now?.() ?? started) - started) / 1000,
  };
}

function check({ graph, block, numbers, energies, recipe }: SiftInput): void {
  const atoms = graph.elements.length;
  if (block.atoms !== atoms) throw new RangeError(`Frames of ${block.atoms} atoms, a graph of ${atoms}.`);
  if (block.positions.length < 3 * block.atoms * block.count) {
    throw new RangeError(`${block.positions.length} coordinates do not make ${block.count} frames.`);
  }
  if (numbers.length !== block.count) {
    throw new RangeError(`${numbers.length} frame numbers for ${block.count} frames.`);
  }
  if (recipe.level !== null && !energies)
    throw new RangeError("The recipe names a level, but no energies came.");
  if (energies && (energies.values.length !== block.count || energies.present.length !== block.count)) {
    throw new RangeError(`${energies.values.length} energies for ${block.count} frames.`);
  }
}

function keptConformers(
  leaders: readonly Leader[],
  numbers: Int32Array,
  walk: Walk,
  recipe: SiftRecipe,
): KeptConformer[] {
  // A chiral shape whose mirror image was merged into it stands for both.
  const degeneracies = leaders.map(({ mirrorRmsd }) =>
    recipe.mirror === "merge" && mirrorRmsd > recipe.rmsdTolerance ? 2 : 1,
  );
  const copies = scaledCopies(
    degeneracies,
    leaders.map((leader) => leader.symmetryNumber),
  );
  return leaders.map((leader, k) => ({
    frame: numbers[leader.row]!,
    relativeEnergy: walk.relative ? walk.relative[leader.step]! : null,
    degeneracy: degeneracies[k]!,
    symmetryNumber: leader.symmetryNumber,
    copies: copies[k]!,
    mirrorRmsd: leader.mirrorRmsd,
    found: leader.found,
    ...(leader.exact ? {} : { upperBound: true }),
  }));
}

/** degeneracy / symmetryNumber over the smallest such value; whole numbers are divided once, so that ratios come out exact. */
function scaledCopies(
  degeneracies: readonly number[],
  symmetry: readonly (number | null)[],
): (number | null)[] {
  let g = Number.POSITIVE_INFINITY;
  let sigma = 1;
  symmetry.forEach((s, k) => {
    if (s === null || degeneracies[k]! * sigma >= g * s) return;
    g = degeneracies[k]!;
    sigma = s;
  });
  return symmetry.map((s, k) => (s === null ? null : (degeneracies[k]! * sigma) / (s * g)));
}

function droppedFrames(found: Leaders, input: SiftInput, energies: SiftEnergies | null): DroppedFrame[] {
  const { numbers } = input;
  const dropped = found.followers.map((follower): DroppedFrame => {
    const leader = found.leaders[follower.leader]!.row;
    return {
      frame: numbers[follower.row]!,
      repeats: numbers[leader]!,
      rmsd: follower.rmsd,
      energyDifference: energies
        ? (energies.values[follower.row]! - energies.values[leader]!) * energies.kcalPerUnit
        : null,
      ...(follower.mirror ? { mirror: true } : {}),
      ...(follower.exact ? {} : { upperBound: true }),
    };
  });
  return dropped.sort((a, b) => a.frame - b.frame);
}

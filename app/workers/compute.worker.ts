import { PairMatrixWork, packedLength } from "../lib/align/pair-matrix.ts";
import { makePlan } from "../lib/align/plan.ts";
import { averageErrorsOf } from "../lib/averages/property-set.ts";
import { drawUncertainty } from "../lib/edition/uncertainty.ts";
import { matchFrames } from "../lib/levels/match-frames.ts";
import { runSift, SiftCancelled } from "../lib/recipe/run.ts";
import { makeGraph } from "../lib/structure.ts";
import {
  type AveragesAnswer,
  type ComputeTask,
  type DrawAnswer,
  MATRIX_COUNTERS,
  type MatchAnswer,
  type MatchTask,
  type MatrixAnswer,
  type MatrixTask,
  matchBuffers,
  type ProgressMessage,
  type SiftAnswer,
  type SiftTask,
} from "./protocol.ts";

const PROGRESS_INTERVAL_MS = 100;

/** Thread entry: one task in, one answer out. It computes and knows neither database nor network. */
export default function compute(
  task: ComputeTask,
): SiftAnswer | MatchAnswer | MatrixAnswer | AveragesAnswer | DrawAnswer {
  if (task.kind === "match") {
    try {
      return match(task);
    } finally {
      for (const buffer of matchBuffers(task)) release(buffer);
    }
  }
  if (task.kind === "draw") return { kind: "drawn", drawn: drawUncertainty(task.input) };
  if (task.kind === "averages") {
    return { kind: "averaged", ...averageErrorsOf(task.moments, task.weighed, task.error) };
  }
  try {
    return task.kind === "sift" ? sift(task) : matrix(task);
  } catch (error) {
    if (error instanceof SiftCancelled) return { kind: "cancelled" };
    throw error;
  } finally {
    task.port.close();
    if (task.kind === "sift") release(task.positions.buffer as ArrayBuffer);
  }
}

/**
 * Gives memory that was moved here back at once, by moving it on to nobody: the coordinates of the largest ensembles are
 * 100 MB, and a thread that waits for work collects late.
 */
function release(buffer: ArrayBuffer): void {
  const { port1, port2 } = new MessageChannel();
  port1.postMessage(null, [buffer]);
  port1.close();
  port2.close();
}

function match(task: MatchTask): MatchAnswer {
  const atoms = task.elements.length;
  const frames = ({ positions, numbers }: MatchTask["own"]) => ({
    block: { atoms, count: numbers.length, positions },
    numbers,
  });
  const { symmetry, tolerance, mirror } = task;
  const matches = matchFrames({
    graph: makeGraph(task.elements, task.bonds, task.isotopes),
    own: frames(task.own),
    other: frames(task.other),
    atoms: task.atoms,
    symmetry,
    tolerance,
    mirror,
  });
  return { kind: "matched", matches };
}

/** Tells how far it is, at most ten times a second. */
function reporter({ port }: SiftTask | MatrixTask): (progress: number, pairs: number) => void {
  let last = 0;
  return (progress, pairs) => {
    const now = performance.now();
    if (now - last < PROGRESS_INTERVAL_MS) return;
    last = now;
    port.postMessage({ progress, pairs } satisfies ProgressMessage);
  };
}

function sift(task: SiftTask): SiftAnswer {
  const report = reporter(task);
  const result = runSift(
    {
      graph: makeGraph(task.elements, task.bonds, task.isotopes),
      block: { atoms: task.atoms, count: task.numbers.length, positions: task.positions },
      numbers: task.numbers,
      energies: task.energies,
      recipe: task.recipe,
    },
    {
      now: () => performance.now(),
      cancelled: () => Atomics.load(task.cancel, 0) !== 0,
      progress: (fraction, pairs) => report(fraction, pairs ?? 0),
    },
  );
  return { kind: "done", result };
}

function matrix(task: MatrixTask): MatrixAnswer {
  const { counters, recipe, kernel } = task;
  const report = reporter(task);
  const cancelled = () => Atomics.load(task.cancel, 0) !== 0;
  const graph = makeGraph(task.elements, task.bonds, task.isotopes);
  const block = {
    atoms: task.atoms,
    count: task.positions.length / (3 * task.atoms),
    positions: task.positions,
  };
  const plan = makePlan(graph, recipe.atoms, { symmetry: recipe.symmetry });
  const work = new PairMatrixWork({ plan, block, mirror: recipe.mirror, kernel });
  const total = packedLength(work.count);
  for (;;) {
    const tile = Atomics.add(counters, MATRIX_COUNTERS.nextTile, 1);
    if (tile >= work.tiles) break;
    work.fill(tile, task.matrix, { cancelled });
    const size = work.pairsIn(tile);
    const pairs = Atomics.add(counters, MATRIX_COUNTERS.pairs, size) + size;
    report(pairs / total, pairs);
  }
  Atomics.add(counters, MATRIX_COUNTERS.inexact, work.inexact);
  return { kind: "done" };
}

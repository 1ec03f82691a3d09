import { matchFrames } from "../lib/levels/match-frames.ts";
import { runSift, SiftCancelled } from "../lib/recipe/run.ts";
import { makeGraph } from "../lib/structure.ts";
import type {
  ComputeTask,
  MatchAnswer,
  MatchTask,
  ProgressMessage,
  SiftAnswer,
  SiftTask,
} from "./protocol.ts";

const PROGRESS_INTERVAL_MS = 100;

/** Thread entry: one task in, one answer out. It computes and knows neither database nor network. */
export default function compute(task: ComputeTask): SiftAnswer | MatchAnswer {
  return task.kind === "match" ? match(task) : sift(task);
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

function sift(task: SiftTask): SiftAnswer {
  let lastReport = 0;
  try {
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
        progress(fraction) {
          const now = performance.now();
          if (now - lastReport < PROGRESS_INTERVAL_MS) return;
          lastReport = now;
          task.port.postMessage({ progress: fraction } satisfies ProgressMessage);
        },
      },
    );
    return { kind: "done", result };
  } catch (error) {
    if (error instanceof SiftCancelled) return { kind: "cancelled" };
    throw error;
  } finally {
    task.port.close();
  }
}

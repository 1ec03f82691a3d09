import { runSift, SiftCancelled } from "../lib/recipe/run.ts";
import { makeGraph } from "../lib/structure.ts";
import type { ComputeTask, ProgressMessage, SiftAnswer } from "./protocol.ts";

const PROGRESS_INTERVAL_MS = 100;

/** Thread entry: one task in, one answer out. It computes and knows neither database nor network. */
export default function compute(task: ComputeTask): SiftAnswer {
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

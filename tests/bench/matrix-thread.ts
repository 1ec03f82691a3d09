import { parentPort, workerData } from "node:worker_threads";
import { PairMatrixWork } from "../../app/lib/align/pair-matrix.ts";
import { makePlan } from "../../app/lib/align/plan.ts";
import { makeGraph } from "../../app/lib/structure.ts";

/** One of the threads that share a pair matrix: takes the next tile as long as there is one. */
export interface MatrixTask {
  elements: Uint8Array;
  bonds: Int32Array;
  atoms: number;
  count: number;
  /** Shared: coordinates, the matrix, and the number of the next tile. */
  positions: SharedArrayBuffer;
  matrix: SharedArrayBuffer;
  next: SharedArrayBuffer;
  symmetry: boolean;
  kernel: WebAssembly.Module | null;
}

const task = workerData as MatrixTask;
const work = new PairMatrixWork({
  plan: makePlan(makeGraph(task.elements, task.bonds), "heavy", { symmetry: task.symmetry }),
  block: { atoms: task.atoms, count: task.count, positions: new Float64Array(task.positions) },
  kernel: task.kernel,
});
const matrix = new Float32Array(task.matrix);
const next = new Int32Array(task.next);
for (let tile = Atomics.add(next, 0, 1); tile < work.tiles; tile = Atomics.add(next, 0, 1)) {
  work.fill(tile, matrix);
}
parentPort?.postMessage("done");

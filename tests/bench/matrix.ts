import path from "node:path";
import { Worker } from "node:worker_threads";
import { packedLength } from "../../app/lib/align/pair-matrix.ts";
import { processor } from "./clock.ts";
import type { Molecule } from "./inputs.ts";
import type { MatrixTask } from "./matrix-thread.ts";

export interface MatrixRun {
  wall: number;
  cpu: number;
  matrix: Float32Array;
}

/** Fills a pair matrix over heavy atoms by `threads` threads, their start included. */
export async function runMatrix(
  base: Molecule,
  options: { count: number; threads: number; symmetry: boolean; kernel: WebAssembly.Module | null },
): Promise<MatrixRun> {
  const { graph, block } = base;
  const positions = new SharedArrayBuffer(8 * 3 * block.atoms * options.count);
  new Float64Array(positions).set(block.positions.subarray(0, 3 * block.atoms * options.count));
  const task: MatrixTask = {
    elements: graph.elements,
    bonds: graph.bonds,
    atoms: block.atoms,
    count: options.count,
    positions,
    matrix: new SharedArrayBuffer(4 * packedLength(options.count)),
    next: new SharedArrayBuffer(4),
    symmetry: options.symmetry,
    kernel: options.kernel,
  };
  const from = { wall: performance.now(), cpu: processor() };
  const script = path.join(import.meta.dirname, "matrix-thread.mjs");
  const threads = Array.from({ length: options.threads }, () => new Worker(script, { workerData: task }));
  await Promise.all(
    threads.map(
      (thread) =>
        new Promise<void>((resolve, reject) => {
          thread.once("error", reject);
          thread.once("exit", () => resolve());
        }),
    ),
  );
  return {
    wall: (performance.now() - from.wall) / 1000,
    cpu: processor() - from.cpu,
    matrix: new Float32Array(task.matrix),
  };
}

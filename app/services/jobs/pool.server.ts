import { existsSync } from "node:fs";
import { readFile } from "node:fs/promises";
import { availableParallelism } from "node:os";
import path from "node:path";
import { MessageChannel, type MessagePort } from "node:worker_threads";
import { Piscina } from "piscina";
import { env } from "../../env.server.ts";
import {
  type AveragesAnswer,
  type AveragesTask,
  type DrawAnswer,
  type DrawTask,
  type MatchAnswer,
  type MatchTask,
  type MatrixAnswer,
  type MatrixTask,
  matchBuffers,
  type ProgressMessage,
  type SiftAnswer,
  type SiftTask,
  transferList,
} from "../../workers/protocol.ts";
import { jobState } from "./state.server.ts";

const BUNDLE = "compute.worker.mjs";

/** How many jobs this process computes at once: one a thread. */
export function threadCount(): number {
  return env().WORKER_THREADS || Math.max(1, availableParallelism() - 1);
}

/** Threads that one pair matrix is shared by: all cores, since it is asked for by hand and others wait their turn fairly. */
export function matrixThreads(): number {
  return env().WORKER_THREADS || availableParallelism();
}

/** Where the thread entry lies, as `scripts/build-worker.mjs` makes it. */
export function workerBundle(): string {
  return path.resolve(env().WORKER_DIRECTORY, BUNDLE);
}

/** True when the thread entry was built; without it no computation can run. */
export function workerBundleExists(): boolean {
  return existsSync(workerBundle());
}

function pool(): Piscina {
  const state = jobState();
  if (state.pool === null) {
    if (!workerBundleExists()) {
      throw new Error(
        `The computing thread ${workerBundle()} was not built: run node scripts/build-worker.mjs.`,
      );
    }
    state.pool = new Piscina({
      filename: workerBundle(),
      minThreads: 1,
      maxThreads: Math.max(threadCount(), matrixThreads()),
      idleTimeout: 60_000,
      // The default stops a waiting thread's event loop, and with it the collector: it kept the coordinates of all its
      // tasks. Measured with 50 MB a task: 200 MB after four, for good; with a loop that runs 50, and none after 10 s.
      // Its message alone wakes a thread then; "async" would have two ways to wake it, and needs neither.
      atomics: "disabled",
    });
  }
  return state.pool;
}

/** Starts the first thread, so that the first sift does not wait for it. */
export function warmPool(): void {
  pool();
}

/** The thread ended without an answer (out of memory, or ended by us); the same task may do better elsewhere. */
export class WorkerLost extends Error {
  override name = "WorkerLost";
}

function isCrash(error: unknown): boolean {
  if (!(error instanceof Error)) return false;
  const code = (error as { code?: unknown }).code;
  return (
    code === "ERR_WORKER_OUT_OF_MEMORY" || error.name === "AbortError" || /worker exited/i.test(error.message)
  );
}

interface TaskHooks {
  progress(fraction: number, pairs: number): void;
  signal: AbortSignal;
}

/**
 * Computes one task in a thread. What `buffers` names is moved there and empty afterwards.
 *
 * @throws WorkerLost when the thread ended; whatever the computation itself throws
 */
async function compute<Task extends { port: MessagePort }, Answer>(
  task: Omit<Task, "port">,
  transfers: (task: Task) => (ArrayBuffer | MessagePort)[],
  hooks: TaskHooks,
): Promise<Answer> {
  const { port1, port2 } = new MessageChannel();
  port1.on("message", ({ progress, pairs }: ProgressMessage) => hooks.progress(progress, pairs));
  port1.unref();
  const full = { ...task, port: port2 } as Task;
  try {
    return await pool().run(full, { transferList: transfers(full), signal: hooks.signal });
  } catch (error) {
    throw asLost(error);
  } finally {
    port1.close();
  }
}

function asLost(error: unknown): unknown {
  return isCrash(error)
    ? new WorkerLost("The computing thread ended before its answer.", { cause: error })
    : error;
}

/** One sift; its arrays are moved to the thread and empty afterwards. Throws as `compute`. */
export function computeSift(task: Omit<SiftTask, "kind" | "port">, hooks: TaskHooks): Promise<SiftAnswer> {
  return compute<SiftTask, SiftAnswer>({ ...task, kind: "sift" }, transferList, hooks);
}

/**
 * Matches the frames of two files in a thread. The task's arrays are moved there and empty afterwards.
 *
 * @throws WorkerLost when the thread ended
 */
export async function computeMatch(task: Omit<MatchTask, "kind">): Promise<MatchAnswer["matches"]> {
  const full: MatchTask = { ...task, kind: "match" };
  try {
    const answer: MatchAnswer = await pool().run(full, { transferList: matchBuffers(full) });
    return answer.matches;
  } catch (error) {
    throw asLost(error);
  }
}

/**
 * What the error of a level makes of averages, in a thread.
 *
 * @throws WorkerLost when the thread ended
 */
export async function computeAverages(task: Omit<AveragesTask, "kind">): Promise<AveragesAnswer> {
  try {
    return await pool().run({ ...task, kind: "averages" } satisfies AveragesTask);
  } catch (error) {
    throw asLost(error);
  }
}

/**
 * The draws of an edition in a thread.
 *
 * @throws WorkerLost when the thread ended
 */
export async function computeDraws(input: DrawTask["input"]): Promise<DrawAnswer["drawn"]> {
  try {
    const answer: DrawAnswer = await pool().run({ kind: "draw", input } satisfies DrawTask);
    return answer.drawn;
  } catch (error) {
    throw asLost(error);
  }
}

/**
 * A pair matrix, by as many threads as `threads` says over shared buffers: the same bytes whatever their number. Throws
 * as `compute`.
 */
export async function computeMatrix(
  task: Omit<MatrixTask, "kind" | "port" | "kernel">,
  hooks: TaskHooks,
  threads = matrixThreads(),
): Promise<MatrixAnswer> {
  const kernel = await compiledKernel();
  const shares = Array.from({ length: threads }, () =>
    compute<MatrixTask, MatrixAnswer>({ ...task, kind: "matrix", kernel }, ({ port }) => [port], hooks),
  );
  const answers = await Promise.all(shares).catch((error: unknown) => {
    // The others must not go on for nobody.
    Atomics.store(task.cancel, 0, 1);
    throw error;
  });
  return answers.find(({ kind }) => kind === "cancelled") ?? { kind: "done" };
}

let kernel: Promise<WebAssembly.Module | null> | null = null;

/** The kernel beside the thread entry; null where it was not built or this machine does not take it. */
function compiledKernel(): Promise<WebAssembly.Module | null> {
  kernel ??= readFile(path.join(path.dirname(workerBundle()), "kernel.wasm"))
    .then((bytes) => WebAssembly.compile(bytes))
    .catch(() => null);
  return kernel;
}

/** Ends all threads. */
export async function endPool(): Promise<void> {
  const state = jobState();
  const open = state.pool;
  state.pool = null;
  await open?.destroy();
}

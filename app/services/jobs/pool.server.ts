import { existsSync } from "node:fs";
import { availableParallelism } from "node:os";
import path from "node:path";
import { MessageChannel } from "node:worker_threads";
import { Piscina } from "piscina";
import { env } from "../../env.server.ts";
import {
  type MatchAnswer,
  type MatchTask,
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
      maxThreads: threadCount(),
      idleTimeout: 60_000,
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

/**
 * Computes one task in a thread. The task's arrays are moved there and empty afterwards.
 *
 * @throws WorkerLost when the thread ended; whatever the computation itself throws
 */
export async function computeSift(
  task: Omit<SiftTask, "kind" | "port">,
  hooks: { progress(fraction: number): void; signal: AbortSignal },
): Promise<SiftAnswer> {
  const { port1, port2 } = new MessageChannel();
  port1.on("message", (message: ProgressMessage) => hooks.progress(message.progress));
  port1.unref();
  const full: SiftTask = { ...task, kind: "sift", port: port2 };
  try {
    return await pool().run(full, { transferList: transferList(full), signal: hooks.signal });
  } catch (error) {
    if (isCrash(error))
      throw new WorkerLost("The computing thread ended before its answer.", { cause: error });
    throw error;
  } finally {
    port1.close();
  }
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
    if (isCrash(error))
      throw new WorkerLost("The computing thread ended before its answer.", { cause: error });
    throw error;
  }
}

/** Ends all threads. */
export async function endPool(): Promise<void> {
  const state = jobState();
  const open = state.pool;
  state.pool = null;
  await open?.destroy();
}

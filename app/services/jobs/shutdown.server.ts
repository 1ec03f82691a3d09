import { log } from "../log.server.ts";
import { askToStop } from "./cancel-job.server.ts";
import { returnAllJobs } from "./finish-job.server.ts";
import { endPool } from "./pool.server.ts";
import { jobState } from "./state.server.ts";
import { answerWaiters } from "./wait-for-job.server.ts";

/** Threads are asked first and ended after a second; no shutdown waits longer for them. */
const PATIENCE_MS = 2_000;

/**
 * Ends all computing in this process: takes no further job, answers who waits for one, stops the threads and hands
 * their jobs back to the queue, where the next start or another process finds them. Safe to call twice.
 */
export async function shutDownJobs(): Promise<void> {
  const state = jobState();
  if (state.stopping) return;
  state.stopping = true;
  if (state.timer !== null) clearInterval(state.timer);
  state.timer = null;
  answerWaiters();
  const running = [...state.running.values()];
  for (const job of running) askToStop(job);
  const all = Promise.all(running.map((job) => job.ended));
  await Promise.race([all, new Promise((resolve) => setTimeout(resolve, PATIENCE_MS).unref())]);
  try {
    await returnAllJobs(state.holder);
  } catch (error) {
    log.warn({ err: error }, "jobs not handed back; their leases end within seconds");
  }
  await endPool();
}

import { eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { jobs } from "../../db/schema.server.ts";
import { jobState } from "./state.server.ts";

/** Another process may finish the job: a look at the row as often. */
const LOOK_MS = 1_000;

/** Tells everybody who waits for a job in this process that it ended. */
export function announceEnd(jobId: string): void {
  const waiting = jobState().waiters.get(jobId);
  jobState().waiters.delete(jobId);
  for (const resolve of waiting ?? []) resolve();
}

/** Answers everybody who waits, at once: a shutdown must not wait for them. */
export function answerWaiters(): void {
  for (const jobId of [...jobState().waiters.keys()]) announceEnd(jobId);
}

async function hasEnded(jobId: string): Promise<boolean> {
  const rows = await db.select({ state: jobs.state }).from(jobs).where(eq(jobs.id, jobId)).limit(1);
  const state = rows[0]?.state;
  return state !== "queued" && state !== "running";
}

/**
 * Waits until a job has ended, but no longer than `milliseconds`, nor past an abort or a shutdown.
 * The caller looks at the job afterwards, whatever ended the wait.
 */
export async function waitForJob(jobId: string, milliseconds: number, signal?: AbortSignal): Promise<void> {
  const end = Date.now() + milliseconds;
  for (;;) {
    const left = end - Date.now();
    if (left <= 0 || signal?.aborted || jobState().stopping) return;
    // Registered before the look, so that an end between the two is not missed.
    const nap = sleepUntilSignal(jobId, Math.min(left, LOOK_MS), signal);
    if (await hasEnded(jobId).catch(() => false)) {
      nap.cancel();
      return;
    }
    await nap.over;
  }
}

function sleepUntilSignal(jobId: string, milliseconds: number, signal?: AbortSignal) {
  const { waiters } = jobState();
  let cancel = () => {};
  const over = new Promise<void>((resolve) => {
    const timer = setTimeout(() => cancel(), milliseconds);
    cancel = () => {
      clearTimeout(timer);
      signal?.removeEventListener("abort", cancel);
      const waiting = waiters.get(jobId);
      waiting?.delete(cancel);
      if (waiting?.size === 0) waiters.delete(jobId);
      resolve();
    };
    signal?.addEventListener("abort", cancel, { once: true });
    const waiting = waiters.get(jobId) ?? new Set();
    waiting.add(cancel);
    waiters.set(jobId, waiting);
  });
  return { over, cancel: () => cancel() };
}

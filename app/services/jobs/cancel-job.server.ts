import { and, eq, inArray, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { jobs } from "../../db/schema.server.ts";
import { jobState, progressHere, type RunningJob } from "./state.server.ts";
import { announceEnd } from "./wait-for-job.server.ts";

/** A thread looks at its word every few milliseconds; one that does not is ended. */
const PATIENCE_MS = 1_000;

/**
 * Marks a job cancelled; true where it was queued or running. Call `stopRunning` once the transaction is in. How far it
 * had come stays with it: the row alone is as old as the last sign of life.
 */
export async function markCancelled(tx: Queryable, jobId: string): Promise<boolean> {
  const [outcome] = await tx
    .update(jobs)
    .set({
      state: "cancelled",
      progress: sql`greatest(${jobs.progress}, ${progressHere(jobId) ?? 0})`,
      leaseUntil: null,
      finishedAt: new Date(),
    })
    .where(and(eq(jobs.id, jobId), inArray(jobs.state, ["queued", "running"])));
  return outcome.affectedRows === 1;
}

/** Asks a thread of this process to stop, and ends it where it does not listen. */
export function askToStop(job: RunningJob): void {
  Atomics.store(job.cancel, 0, 1);
  setTimeout(() => job.abort.abort(), PATIENCE_MS).unref();
}

/** Stops the computation of a cancelled job where this process runs it, and answers who waits for it. */
export function stopRunning(jobId: string): void {
  const job = jobState().running.get(jobId);
  if (job) askToStop(job);
  announceEnd(jobId);
}

/** Cancels a job: a queued one never begins, a running one stops. */
export async function cancelJob(jobId: string): Promise<boolean> {
  const was = await markCancelled(db, jobId);
  stopRunning(jobId);
  return was;
}

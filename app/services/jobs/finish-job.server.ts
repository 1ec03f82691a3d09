import { and, eq, inArray, lt, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { jobs } from "../../db/schema.server.ts";
import { inBackground } from "../background.server.ts";
import { tellOfJob } from "../mail/long-work.server.ts";

/** A job that keeps losing its thread or its process is given up after as many tries. */
export const MAX_ATTEMPTS = 3;

const GIVEN_UP =
  "The computation was begun three times and ended each time before it was done, most likely for want of memory. Try heavy atoms only, or a narrower energy window.";

/** The job was cancelled or taken over while it ran: its result must not be written. */
export class JobLost extends Error {
  override name = "JobLost";
}

const mine = (jobId: string, holder: string) =>
  and(eq(jobs.id, jobId), eq(jobs.holder, holder), eq(jobs.state, "running"));

/**
 * Marks a job done, in the transaction that writes its result.
 *
 * @throws JobLost where this process does not hold it any more; the transaction then rolls back
 */
export async function finishJob(tx: Queryable, jobId: string, holder: string): Promise<void> {
  const [outcome] = await tx
    .update(jobs)
    .set({ state: "done", progress: 1, leaseUntil: null, finishedAt: new Date(), error: null })
    .where(mine(jobId, holder));
  if (outcome.affectedRows !== 1) throw new JobLost(`Job ${jobId} is not ours any more.`);
}

/** Marks a job failed with words for people; no effect where it was cancelled or taken over meanwhile. */
export async function failJob(jobId: string, holder: string, message: string): Promise<void> {
  await db
    .update(jobs)
    .set({ state: "failed", leaseUntil: null, finishedAt: new Date(), error: message.slice(0, 500) })
    .where(mine(jobId, holder));
}

/** Hands a job back to the queue; one that has had its tries fails instead. */
export async function returnJob(jobId: string, holder: string): Promise<void> {
  await db
    .update(jobs)
    .set({
      state: sql`if(${jobs.attempts} >= ${MAX_ATTEMPTS}, 'failed', 'queued')`,
      error: sql`if(${jobs.attempts} >= ${MAX_ATTEMPTS}, ${GIVEN_UP}, null)`,
      finishedAt: sql`if(${jobs.attempts} >= ${MAX_ATTEMPTS}, utc_timestamp(3), null)`,
      holder: null,
      leaseUntil: null,
      progress: 0,
    })
    .where(mine(jobId, holder));
  inBackground("letter of a job", () => tellOfJob(jobId, null));
}

/** Hands all jobs of this process back as if it had never begun them: a shutdown is no failed try. */
export async function returnAllJobs(holder: string): Promise<void> {
  await db
    .update(jobs)
    .set({
      state: "queued",
      holder: null,
      leaseUntil: null,
      progress: 0,
      attempts: sql`greatest(${jobs.attempts} - 1, 0)`,
    })
    .where(and(eq(jobs.holder, holder), eq(jobs.state, "running")));
}

/** Takes jobs back whose process has given no sign of life within its lease. */
export async function recoverJobs(): Promise<void> {
  const dead = await db
    .select({ id: jobs.id, holder: jobs.holder })
    .from(jobs)
    .where(and(eq(jobs.state, "running"), lt(jobs.leaseUntil, sql`utc_timestamp(3)`)));
  for (const { id, holder } of dead) if (holder !== null) await returnJob(id, holder);
}

/** Those of the jobs that this process still holds. */
export async function stillHeld(jobIds: string[], holder: string): Promise<Set<string>> {
  if (jobIds.length === 0) return new Set();
  const rows = await db
    .select({ id: jobs.id })
    .from(jobs)
    .where(and(inArray(jobs.id, jobIds), eq(jobs.holder, holder), eq(jobs.state, "running")));
  return new Set(rows.map((row) => row.id));
}

import { and, desc, eq } from "drizzle-orm";
import { db, inTransaction, type Queryable } from "../../db/client.server.ts";
import { editions, jobs } from "../../db/schema.server.ts";
import type { VerifyingView } from "../../lib/edition/views.ts";
import { type Actor, accessEdition } from "../auth/access.server.ts";
import { verifyJob } from "../jobs/definitions/verify.ts";
import { enqueueJob } from "../jobs/enqueue-job.server.ts";
import { wakeJobs } from "../jobs/run-jobs.server.ts";
import { progressHere } from "../jobs/state.server.ts";

/** Jobs looked through for those of one ensemble: older ones have long had their outcome kept. */
const MOST_JOBS = 200;

/** The newest job of each edition, by the edition's id. */
async function newestJobs(on: Queryable, teamId: string) {
  const rows = await on
    .select({
      id: jobs.id,
      payload: jobs.payload,
      state: jobs.state,
      progress: jobs.progress,
      error: jobs.error,
    })
    .from(jobs)
    .where(and(eq(jobs.teamId, teamId), eq(jobs.definition, verifyJob.name)))
    .orderBy(desc(jobs.createdAt), desc(jobs.id))
    .limit(MOST_JOBS);
  const newest = new Map<string, (typeof rows)[number]>();
  for (const row of rows) {
    const { editionId } = verifyJob.payload.parse(row.payload);
    if (!newest.has(editionId)) newest.set(editionId, row);
  }
  return newest;
}

/** Recomputations that wait, run or failed, by the id of their edition. */
export async function findVerifying(teamId: string): Promise<Map<string, VerifyingView>> {
  const found = new Map<string, VerifyingView>();
  for (const [editionId, job] of await newestJobs(db, teamId)) {
    if (job.state !== "queued" && job.state !== "running" && job.state !== "failed") continue;
    found.set(editionId, {
      state: job.state,
      progress: progressHere(job.id) ?? job.progress,
      error: job.state === "failed" ? job.error : null,
    });
  }
  return found;
}

/**
 * Puts the recomputation of an edition into the queue; one that waits or runs already is not asked for twice.
 *
 * @returns id of the job
 */
export async function askToVerify(options: {
  actor: Actor;
  ensembleId: string;
  number: number;
}): Promise<string> {
  const grant = await accessEdition(options.actor, "share", options.ensembleId, options.number);
  const { editionId, teamId, userId } = grant;
  const jobId = await inTransaction(async (tx) => {
    // Two who press at once: the second waits here and finds the job of the first.
    await tx.select({ id: editions.id }).from(editions).where(eq(editions.id, editionId)).for("update");
    const last = (await newestJobs(tx, teamId)).get(editionId);
    if (last?.state === "queued" || last?.state === "running") return last.id;
    return enqueueJob(tx, verifyJob, { payload: { editionId, userId }, teamId, userId });
  });
  wakeJobs();
  return jobId;
}

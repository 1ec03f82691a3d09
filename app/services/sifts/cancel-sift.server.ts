import { inTransaction } from "../../db/client.server.ts";
import type { SiftStatus } from "../../lib/views.ts";
import { type Actor, accessSift } from "../auth/access.server.ts";
import { markCancelled, stopRunning } from "../jobs/cancel-job.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { findSift } from "./find-sift.server.ts";

/** Cancels a sift that waits or runs; one that has ended stays as it is. */
export async function cancelSift(options: {
  actor: Actor;
  siftId: string;
}): Promise<{ id: string; status: SiftStatus; progress: number }> {
  const grant = await accessSift(options.actor, "compute", options.siftId);
  const { jobId } = await findSift(grant.siftId);
  await inTransaction(async (tx) => {
    if (!(await markCancelled(tx, jobId))) return;
    await writeEntry(tx, grant, grant, { type: "sift-cancelled", data: { siftId: grant.siftId } });
  });
  stopRunning(jobId);
  const { id, status, progress } = await findSift(grant.siftId);
  return { id, status, progress };
}

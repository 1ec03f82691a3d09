import { and, eq, inArray, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { ensembles, jobs, sifts } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { markCancelled, stopRunning } from "../jobs/cancel-job.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

/**
 * Deletes an ensemble for everybody who looks; its rows stay, so that it can be brought back. The same files may be
 * taken in anew at once.
 */
export async function deleteEnsemble(options: { actor: Actor; ensembleId: string }): Promise<void> {
  const grant = await accessEnsemble(options.actor, "manage", options.ensembleId);
  const stopped = await inTransaction(async (tx) => {
    const rows = await tx
      .select({ name: ensembles.name, version: ensembles.version })
      .from(ensembles)
      .where(
        and(
          eq(ensembles.id, grant.ensembleId),
          eq(ensembles.teamId, grant.teamId),
          isNull(ensembles.deletedAt),
        ),
      )
      .for("update");
    const row = rows[0];
    if (row === undefined) throw notFound();
    const now = new Date();
    await tx
      .update(ensembles)
      .set({ deletedAt: now, changedAt: now, filesSha: null, version: row.version + 1 })
      .where(eq(ensembles.id, grant.ensembleId));
    const open = await tx
      .select({ jobId: jobs.id })
      .from(sifts)
      .innerJoin(jobs, eq(jobs.id, sifts.jobId))
      .where(and(eq(sifts.ensembleId, grant.ensembleId), inArray(jobs.state, ["queued", "running"])));
    for (const { jobId } of open) await markCancelled(tx, jobId);
    await writeEntry(tx, grant, grant, { type: "deleted", data: { name: row.name } });
    return open;
  });
  for (const { jobId } of stopped) stopRunning(jobId);
}

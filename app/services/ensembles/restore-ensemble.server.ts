import { and, eq, isNotNull, isNull } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { isId } from "../../db/new-id.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { firstFilesSha } from "./batches.server.ts";
import { findSameFiles } from "./same-files.server.ts";

/** A deleted ensemble; one whose upload never ended is none. */
const deleted = (ensembleId: string) =>
  and(eq(ensembles.id, ensembleId), isNotNull(ensembles.deletedAt), isNull(ensembles.readingSince));

/**
 * Brings a deleted ensemble back as it was. Where the same files were taken in anew since, that ensemble goes on
 * answering for them.
 *
 * @throws DomainError not-found where nothing of this id was deleted, forbidden for who is no owner
 */
export async function restoreEnsemble(options: { actor: Actor; ensembleId: string }): Promise<void> {
  const { ensembleId } = options;
  const found = isId(ensembleId)
    ? await db.select({ teamId: ensembles.teamId }).from(ensembles).where(deleted(ensembleId)).limit(1)
    : [];
  const teamId = found[0]?.teamId;
  if (teamId === undefined) throw notFound();
  const grant = await accessTeam(options.actor, "manage", teamId);
  await inTransaction(async (tx) => {
    const rows = await tx
      .select({ name: ensembles.name, version: ensembles.version })
      .from(ensembles)
      .where(and(deleted(ensembleId), eq(ensembles.teamId, grant.teamId)))
      .for("update");
    const row = rows[0];
    if (row === undefined) throw notFound();
    const sha = await firstFilesSha(tx, ensembleId);
    const taken = sha !== null && (await findSameFiles(grant.teamId, sha)) !== null;
    await tx
      .update(ensembles)
      .set({
        deletedAt: null,
        changedAt: new Date(),
        filesSha: taken ? null : sha,
        version: row.version + 1,
      })
      .where(eq(ensembles.id, ensembleId));
    await writeEntry(tx, { teamId: grant.teamId, ensembleId }, grant, {
      type: "restored",
      data: { name: row.name },
    });
  });
}

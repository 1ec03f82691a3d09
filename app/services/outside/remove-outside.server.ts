import { and, eq, isNotNull, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { outsideStructures } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

/**
 * Takes a structure from outside away, or brings it back.
 *
 * @throws DomainError not-found where the ensemble has none of this id in that state
 */
export async function removeOutside(options: {
  actor: Actor;
  ensembleId: string;
  outsideId: string;
  /** Brings it back instead. */
  undo?: boolean;
}): Promise<{ name: string }> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const undo = options.undo === true;
  return inTransaction(async (tx) => {
    const mine = and(
      eq(outsideStructures.id, options.outsideId),
      eq(outsideStructures.ensembleId, grant.ensembleId),
      undo ? isNotNull(outsideStructures.deletedAt) : isNull(outsideStructures.deletedAt),
    );
    const rows = await tx
      .select({ name: outsideStructures.name })
      .from(outsideStructures)
      .where(mine)
      .for("update");
    const row = rows[0];
    if (row === undefined) throw notFound();
    await tx
      .update(outsideStructures)
      .set({ deletedAt: undo ? null : new Date() })
      .where(mine);
    const type = undo ? "outside-restored" : "outside-removed";
    await writeEntry(tx, grant, grant, { type, data: { name: row.name } });
    return { name: row.name };
  });
}

import { and, eq, isNotNull, isNull } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { plans } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { lockEnsemble } from "../columns/store-column.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { planNameTaken } from "./save-plans.server.ts";

/**
 * Removes a stored set of plans, or brings it back within thirty days: under its name, with its version.
 *
 * @throws DomainError conflict (409) where another plan has taken the name meanwhile, not-found where the ensemble has
 *   none of this id in that state
 */
export async function removePlans(options: {
  actor: Actor;
  ensembleId: string;
  id: string;
  /** Brings it back instead. */
  undo?: boolean;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const undo = options.undo === true;
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, grant);
    const here = eq(plans.ensembleId, grant.ensembleId);
    const removed = undo ? isNotNull(plans.deletedAt) : isNull(plans.deletedAt);
    const mine = and(here, eq(plans.id, options.id), removed);
    const rows = await tx.select({ name: plans.name }).from(plans).where(mine);
    const row = rows[0];
    if (row === undefined) throw notFound();
    if (undo) {
      const named = and(here, eq(plans.name, row.name), isNull(plans.deletedAt));
      const same = await tx.select({ id: plans.id }).from(plans).where(named);
      if (same.length > 0) throw planNameTaken(row.name);
    }
    await tx
      .update(plans)
      .set({ deletedAt: undo ? null : new Date() })
      .where(mine);
    const type = undo ? "plan-restored" : "plan-removed";
    await writeEntry(tx, grant, grant, { type, data: { id: options.id, name: row.name } });
  });
}

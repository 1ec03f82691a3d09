import { and, asc, desc, eq, isNotNull, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { plans } from "../../db/schema.server.ts";
import { type PlanSet, planSetSchema } from "../../lib/plan/plan.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";

/** A stored set of plans, as the page opens it. */
export interface SavedPlans {
  id: string;
  name: string;
  version: number;
  /** ISO, UTC. */
  changedAt: string;
  plans: PlanSet;
}

/** The plans of an ensemble by name. What an older version wrote and nobody can read any more is left out. */
export async function listPlans(options: { actor: Actor; ensembleId: string }): Promise<SavedPlans[]> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const rows = await db
    .select()
    .from(plans)
    .where(and(eq(plans.ensembleId, ensembleId), isNull(plans.deletedAt)))
    .orderBy(asc(plans.name));
  return rows.flatMap((row) => {
    const read = planSetSchema.safeParse(row.plan);
    if (!read.success) return [];
    return [
      {
        id: row.id,
        name: row.name,
        version: row.version,
        changedAt: row.changedAt.toISOString(),
        plans: read.data,
      },
    ];
  });
}

/** A plan that was removed and can be brought back. */
export interface RemovedPlan {
  id: string;
  name: string;
  /** ISO, UTC. */
  removedAt: string;
}

/** The removed plans of an ensemble, the last one first; purged after thirty days. */
export async function listRemovedPlans(options: {
  actor: Actor;
  ensembleId: string;
}): Promise<RemovedPlan[]> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const rows = await db
    .select({ id: plans.id, name: plans.name, deletedAt: plans.deletedAt })
    .from(plans)
    .where(and(eq(plans.ensembleId, ensembleId), isNotNull(plans.deletedAt)))
    .orderBy(desc(plans.deletedAt), asc(plans.id));
  return rows.flatMap(({ id, name, deletedAt }) =>
    deletedAt === null ? [] : [{ id, name, removedAt: deletedAt.toISOString() }],
  );
}

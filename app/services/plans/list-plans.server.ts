import { asc, eq } from "drizzle-orm";
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
  const rows = await db.select().from(plans).where(eq(plans.ensembleId, ensembleId)).orderBy(asc(plans.name));
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

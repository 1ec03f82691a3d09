import { and, eq, isNull } from "drizzle-orm";
import { z } from "zod";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { plans } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { type PlanSet, planSetSchema } from "../../lib/plan/plan.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { lockEnsemble } from "../columns/store-column.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

export const planNameSchema = z.string().trim().min(1).max(120);

export interface SavedAs {
  id: string;
  version: number;
}

/** 409 for the name of another plan. */
export function planNameTaken(name: string): DomainError {
  const message = `There is a plan "${name}" already. Open that one, or give this one another name.`;
  return new DomainError("conflict", "The name is taken", message, { faults: [{ field: "name", message }] });
}

/**
 * Stores a set of plans under a name. With `id` and `version` it takes the place of that one, if nobody has changed it since.
 *
 * @throws DomainError conflict (409) where the name is taken, or the plan was changed since it was opened; invalid for
 *   what is no plan
 */
export async function savePlans(options: {
  actor: Actor;
  ensembleId: string;
  name: string;
  plans: unknown;
  id?: string;
  version?: number;
}): Promise<SavedAs> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const name = planNameSchema.safeParse(options.name);
  if (!name.success) {
    const message = "Give the plan a name of 1 to 120 characters.";
    throw new DomainError("invalid", "No name", message, { faults: [{ field: "name", message }] });
  }
  const read = planSetSchema.safeParse(options.plans);
  if (!read.success) {
    throw new DomainError(
      "invalid",
      "No plan",
      "What was sent is no plan. Load the page again and set it anew.",
    );
  }
  return inTransaction(async (tx) => {
    // Locked, so that two people who save at the same moment come one after the other.
    await lockEnsemble(tx, grant);
    const saved = await store(tx, grant.ensembleId, grant.userId, {
      ...options,
      name: name.data,
      plans: read.data,
    });
    await writeEntry(tx, grant, grant, {
      type: "plan-saved",
      data: { id: saved.id, name: name.data, version: saved.version },
    });
    return saved;
  });
}

async function store(
  tx: Transaction,
  ensembleId: string,
  userId: string | null,
  asked: { id?: string; version?: number; name: string; plans: PlanSet },
): Promise<SavedAs> {
  const now = new Date();
  const named = await tx
    .select({ id: plans.id })
    .from(plans)
    .where(and(eq(plans.ensembleId, ensembleId), eq(plans.name, asked.name), isNull(plans.deletedAt)));
  if (named.some(({ id }) => id !== asked.id)) throw planNameTaken(asked.name);
  if (asked.id === undefined) {
    const id = newId();
    await tx.insert(plans).values({
      id,
      ensembleId,
      name: asked.name,
      plan: asked.plans,
      createdBy: userId,
      createdAt: now,
      changedAt: now,
    });
    return { id, version: 1 };
  }
  const rows = await tx
    .select({ version: plans.version, name: plans.name })
    .from(plans)
    .where(and(eq(plans.ensembleId, ensembleId), eq(plans.id, asked.id), isNull(plans.deletedAt)));
  const row = rows[0];
  if (row === undefined) throw notFound();
  if (row.version !== asked.version) {
    throw new DomainError(
      "conflict",
      "The plan was changed meanwhile",
      `Somebody saved "${row.name}" after you opened it. Save yours under another name, or load the page again to see theirs.`,
    );
  }
  const version = row.version + 1;
  await tx
    .update(plans)
    .set({ name: asked.name, plan: asked.plans, version, changedAt: now })
    .where(eq(plans.id, asked.id));
  return { id: asked.id, version };
}

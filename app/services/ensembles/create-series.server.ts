import { and, eq } from "drizzle-orm";
import { z } from "zod";
import { inTransaction, type Queryable } from "../../db/client.server.ts";
import { isDuplicate } from "../../db/driver-errors.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { series } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { type Doer, writeEntry } from "../logbook/write-entry.server.ts";

/** Where ensembles go that name no series. */
export const DEFAULT_SERIES = "Unsorted";

export const seriesNameSchema = z.string().trim().min(1, "Give the series a name.").max(120);

/** The id of a team's series by name, made where it is new. */
export async function seriesByName(tx: Queryable, teamId: string, name: string, by: Doer): Promise<string> {
  const found = await tx
    .select({ id: series.id })
    .from(series)
    .where(and(eq(series.teamId, teamId), eq(series.name, name)));
  if (found[0]) return found[0].id;
  const id = newId();
  await tx.insert(series).values({ id, teamId, name, createdAt: new Date() });
  await writeEntry(tx, { teamId }, by, { type: "series-made", data: { name } });
  return id;
}

/**
 * Makes a series.
 *
 * @throws DomainError conflict where the team has one of this name
 */
export async function createSeries(options: {
  actor: Actor;
  teamId: string;
  name: string;
}): Promise<{ id: string }> {
  const grant = await accessTeam(options.actor, "compute", options.teamId);
  const name = seriesNameSchema.parse(options.name);
  const id = newId();
  try {
    await inTransaction(async (tx) => {
      await tx.insert(series).values({ id, teamId: grant.teamId, name, createdAt: new Date() });
      await writeEntry(tx, grant, grant, { type: "series-made", data: { name } });
    });
  } catch (error) {
    if (!isDuplicate(error)) throw error;
    const message = `This team already has a series "${name}". Choose another name.`;
    throw new DomainError("conflict", "The name is taken", message, { faults: [{ field: "name", message }] });
  }
  return { id };
}

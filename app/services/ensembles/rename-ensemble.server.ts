import { and, eq, isNull } from "drizzle-orm";
import { z } from "zod";
import { inTransaction } from "../../db/client.server.ts";
import { ensembles, series } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";

export const ensembleNameSchema = z.string().trim().min(1, "Give the ensemble a name.").max(200);

/** Gives an ensemble another name. */
export async function renameEnsemble(options: {
  actor: Actor;
  ensembleId: string;
  name: string;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const after = ensembleNameSchema.parse(options.name);
  await inTransaction(async (tx) => {
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
    if (row.name === after) return;
    await tx
      .update(ensembles)
      .set({ name: after, version: row.version + 1, changedAt: new Date() })
      .where(eq(ensembles.id, grant.ensembleId));
    await writeEntry(tx, grant, grant, { type: "renamed", data: { before: row.name, after } });
  });
}

/** Moves an ensemble to another series of its team. */
export async function moveEnsemble(options: {
  actor: Actor;
  ensembleId: string;
  seriesId: string;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  await inTransaction(async (tx) => {
    const there = await tx
      .select({ id: series.id, name: series.name })
      .from(series)
      .where(and(eq(series.id, options.seriesId), eq(series.teamId, grant.teamId)));
    const here = await tx
      .select({ id: series.id, name: series.name, version: ensembles.version })
      .from(ensembles)
      .innerJoin(series, eq(series.id, ensembles.seriesId))
      .where(and(eq(ensembles.id, grant.ensembleId), isNull(ensembles.deletedAt)))
      .for("update");
    const [target, source] = [there[0], here[0]];
    if (!target || !source) throw notFound();
    if (target.id === source.id) return;
    await tx
      .update(ensembles)
      .set({ seriesId: target.id, version: source.version + 1, changedAt: new Date() })
      .where(eq(ensembles.id, grant.ensembleId));
    await writeEntry(tx, grant, grant, { type: "moved", data: { before: source.name, after: target.name } });
  });
}

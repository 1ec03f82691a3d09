import { and, eq, inArray, isNotNull, isNull, lt, notExists, sql } from "drizzle-orm";
import { db } from "../db/client.server.ts";
import {
  columns,
  editions,
  ensembleFiles,
  ensembles,
  links,
  outsideStructures,
  plans,
  removedColumns,
  sources,
  teams,
  users,
  verifications,
} from "../db/schema.server.ts";
import { UNDO_DAYS } from "./account/undo-days.ts";

const DAY_MS = 86_400_000;
/** Ensembles a statement: each takes its frames and blocks along. */
const AT_ONCE = 20;

async function removeEnsembles(where: ReturnType<typeof and>): Promise<void> {
  for (;;) {
    const rows = await db.select({ id: ensembles.id }).from(ensembles).where(where).limit(AT_ONCE);
    if (rows.length === 0) return;
    await db.delete(ensembles).where(
      inArray(
        ensembles.id,
        rows.map(({ id }) => id),
      ),
    );
  }
}

/** Original bytes that no ensemble, column and outside structure names any more. */
async function removeUnusedSources(before: Date): Promise<void> {
  const byFile = db.select().from(ensembleFiles).where(eq(ensembleFiles.sourceId, sources.id));
  const byOutside = db.select().from(outsideStructures).where(eq(outsideStructures.sourceId, sources.id));
  const byColumn = db.select().from(columns).where(eq(columns.sourceId, sources.id));
  const byRemoved = db.select().from(removedColumns).where(eq(removedColumns.sourceId, sources.id));
  const unused = [byFile, byOutside, byColumn, byRemoved].map((rows) => notExists(rows));
  await db.delete(sources).where(and(isNotNull(sources.sha256), lt(sources.createdAt, before), ...unused));
}

async function removeTeam(teamId: string): Promise<void> {
  await removeEnsembles(eq(ensembles.teamId, teamId));
  await db.delete(teams).where(eq(teams.id, teamId));
}

/** Editions stand without a foreign key: they go once the row of their team is gone, and not before. */
async function removeOrphanedEditions(): Promise<void> {
  const gone = sql`not exists (select 1 from ${teams} where ${teams.id} = ${editions.teamId})`;
  const rows = await db.select({ id: editions.id }).from(editions).where(gone);
  for (const { id } of rows) {
    await db.delete(links).where(eq(links.editionId, id));
    await db.delete(verifications).where(eq(verifications.editionId, id));
    await db.delete(editions).where(eq(editions.id, id));
  }
}

/**
 * Removes for good what was deleted more than 30 days ago: ensembles with their bytes, structures from outside, plans, teams
 * with all they hold, accounts. Safe to run twice and to be cut short. Editions of a living team stay, whatever became of their ensemble.
 */
export async function purgeDeleted(now = new Date()): Promise<void> {
  const before = new Date(now.getTime() - UNDO_DAYS * DAY_MS);
  await removeEnsembles(and(lt(ensembles.deletedAt, before), isNull(ensembles.readingSince)));
  await db.delete(removedColumns).where(lt(removedColumns.removedAt, before));
  await db.delete(outsideStructures).where(lt(outsideStructures.deletedAt, before));
  await db.delete(plans).where(lt(plans.deletedAt, before));
  await removeUnusedSources(before);
  const ended = await db.select({ id: teams.id }).from(teams).where(lt(teams.deletedAt, before));
  for (const { id } of ended) await removeTeam(id);
  await removeOrphanedEditions();
  await db.delete(users).where(lt(users.deletedAt, before));
}

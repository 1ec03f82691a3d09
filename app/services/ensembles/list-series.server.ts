import { and, asc, count, eq, isNull, sum } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles, series } from "../../db/schema.server.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";

export interface SeriesRow {
  id: string;
  name: string;
  ensembles: number;
  frames: number;
}

/** The series of a team by name, with what they hold. */
export async function listSeries(options: { actor: Actor; teamId: string }): Promise<SeriesRow[]> {
  const grant = await accessTeam(options.actor, "read", options.teamId);
  const rows = await db
    .select({
      id: series.id,
      name: series.name,
      ensembles: count(ensembles.id),
      frames: sum(ensembles.frames),
    })
    .from(series)
    .leftJoin(ensembles, and(eq(ensembles.seriesId, series.id), isNull(ensembles.deletedAt)))
    .where(eq(series.teamId, grant.teamId))
    .groupBy(series.id, series.name)
    .orderBy(asc(series.name));
  return rows.map((row) => ({
    ...row,
    name: escapeControls(row.name),
    frames: Number(row.frames ?? 0),
  }));
}

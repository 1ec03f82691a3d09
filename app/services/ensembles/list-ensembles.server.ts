import { and, asc, count, desc, eq, inArray, isNull, or } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembleFiles, ensembles, frames, series } from "../../db/schema.server.ts";
import { escapeControls } from "../../lib/text/escape.ts";
import type { EnsembleRow } from "../../lib/views.ts";
import { defaultsOf, settingsApart } from "../../lib/workbench/recipe-words.ts";
import { type Actor, accessTeam, type Grant } from "../auth/access.server.ts";
import { chooseSift, findSiftsOf } from "../sifts/find-sift.server.ts";

/** Living ensembles of the team that the caller may see, of one series where asked for. */
export function visibleTo(grant: Grant, seriesNameOrId?: string) {
  return and(
    eq(ensembles.teamId, grant.teamId),
    isNull(ensembles.deletedAt),
    grant.onlyOwnOfToken === null ? undefined : eq(ensembles.createdByToken, grant.onlyOwnOfToken),
    seriesNameOrId === undefined
      ? undefined
      : or(eq(series.name, seriesNameOrId), eq(series.id, seriesNameOrId)),
  );
}

/** How many ensembles `visibleTo` finds. */
export async function countEnsembles(where: ReturnType<typeof visibleTo>): Promise<number> {
  const rows = await db
    .select({ n: count() })
    .from(ensembles)
    .innerJoin(series, eq(series.id, ensembles.seriesId))
    .where(where);
  return rows[0]?.n ?? 0;
}

async function groupByEnsemble<Row extends { ensembleId: string }>(
  rows: Promise<Row[]>,
): Promise<Map<string, Row[]>> {
  const groups = new Map<string, Row[]>();
  for (const row of await rows) groups.set(row.ensembleId, [...(groups.get(row.ensembleId) ?? []), row]);
  return groups;
}

/** The energy levels of many ensembles at once, in order of arrival. */
export function levelsOfEnsembles(ids: string[]) {
  const { ensembleId, name, ordinal } = columns;
  return groupByEnsemble(
    db
      .select({ ensembleId, name, ordinal })
      .from(columns)
      .where(and(inArray(ensembleId, ids), eq(columns.kind, "energy")))
      .orderBy(asc(ordinal)),
  );
}

function filesOfEnsembles(ids: string[]) {
  const { ensembleId, name, position } = ensembleFiles;
  return groupByEnsemble(
    db
      .select({ ensembleId, name })
      .from(ensembleFiles)
      .where(inArray(ensembleId, ids))
      .orderBy(asc(position)),
  );
}

/** Frames that are held for nothing but an open question, by ensemble. */
async function waitingIn(ids: string[]): Promise<Map<string, number>> {
  if (ids.length === 0) return new Map();
  const rows = await db
    .select({ ensembleId: frames.ensembleId, waiting: count() })
    .from(frames)
    .where(
      and(
        inArray(frames.ensembleId, ids),
        eq(frames.state, "held"),
        eq(frames.holdReason, "waits-for-answer"),
      ),
    )
    .groupBy(frames.ensembleId);
  return new Map(rows.map((row) => [row.ensembleId, row.waiting]));
}

/** The table of a team's ensembles, last changed first. */
export async function listEnsembles(options: {
  actor: Actor;
  teamId: string;
  series?: string;
}): Promise<EnsembleRow[]> {
  const grant = await accessTeam(options.actor, "read", options.teamId);
  const rows = await db
    .select({
      id: ensembles.id,
      name: ensembles.name,
      formula: ensembles.formula,
      series: { id: series.id, name: series.name },
      frames: ensembles.frames,
      held: ensembles.held,
      openQuestions: ensembles.openQuestions,
      changedAt: ensembles.changedAt,
    })
    .from(ensembles)
    .innerJoin(series, eq(series.id, ensembles.seriesId))
    .where(visibleTo(grant, options.series))
    .orderBy(desc(ensembles.changedAt), desc(ensembles.id));
  if (rows.length === 0) return [];
  const ids = rows.map((row) => row.id);
  const asking = rows.filter((row) => row.openQuestions > 0).map((row) => row.id);
  const [levels, files, sifts, waiting] = await Promise.all([
    levelsOfEnsembles(ids),
    filesOfEnsembles(ids),
    groupByEnsemble(findSiftsOf(ids)),
    waitingIn(asking),
  ]);
  return rows.map((row) => {
    const chosen = chooseSift(sifts.get(row.id) ?? []);
    return {
      ...row,
      name: escapeControls(row.name),
      series: { ...row.series, name: escapeControls(row.series.name) },
      waiting: waiting.get(row.id) ?? 0,
      levels: (levels.get(row.id) ?? []).map(({ name, ordinal }) => ({ name, ordinal })),
      fileNames: (files.get(row.id) ?? []).map((file) => file.name),
      sift:
        chosen === null
          ? null
          : {
              id: chosen.id,
              status: chosen.status,
              progress: chosen.progress,
              distinct: chosen.keptCount,
              shares: chosen.summary?.shares ?? [],
              lowest: chosen.summary?.lowest ?? null,
              effectiveCount: chosen.summary?.effectiveCount ?? null,
              changed: settingsApart(chosen.recipe, defaultsOf(chosen.recipe)).map(({ is }) => is),
            },
      changedAt: row.changedAt.toISOString(),
    };
  });
}

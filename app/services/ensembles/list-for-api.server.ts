import { and, asc, desc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembles, series } from "../../db/schema.server.ts";
import type { EnsembleListAnswer } from "../../lib/api/schemas.ts";
import { type Actor, accessTeam } from "../auth/access.server.ts";
import { frameStrip } from "./accepted-frames.server.ts";
import { ensembleUrl } from "./describe-ensemble.server.ts";
import { findColumns, toLevels } from "./find-columns.server.ts";
import { countEnsembles, visibleTo } from "./list-ensembles.server.ts";

const PAGE_SIZE = 50;

async function levelsOf(ensembleId: string) {
  const found = await findColumns(ensembleId, await frameStrip(ensembleId));
  return toLevels(found).map(({ ordinal: _, ...level }) => level);
}

/** Those of the ensembles that have a level at all: the others need no look at their frames. */
async function withLevels(ids: string[]): Promise<Set<string>> {
  if (ids.length === 0) return new Set();
  const rows = await db
    .selectDistinct({ id: columns.ensembleId })
    .from(columns)
    .where(and(inArray(columns.ensembleId, ids), eq(columns.kind, "energy")))
    .orderBy(asc(columns.ensembleId));
  return new Set(rows.map((row) => row.id));
}

/** One page of a team's ensembles as the API lists them, newest first. */
export async function listForApi(options: {
  actor: Actor;
  teamId: string;
  series?: string;
  page?: number;
}): Promise<EnsembleListAnswer> {
  const grant = await accessTeam(options.actor, "read", options.teamId);
  const where = visibleTo(grant, options.series);
  const page = options.page ?? 1;
  const total = await countEnsembles(where);
  const rows = await db
    .select({ ensemble: ensembles, series: { id: series.id, name: series.name } })
    .from(ensembles)
    .innerJoin(series, eq(series.id, ensembles.seriesId))
    .where(where)
    .orderBy(desc(ensembles.createdAt), desc(ensembles.id))
    .limit(PAGE_SIZE)
    .offset((page - 1) * PAGE_SIZE);
  const having = await withLevels(rows.map(({ ensemble }) => ensemble.id));
  const listed = rows.map(async ({ ensemble, series: of }) => {
    const { id, name, formula, atoms, frames, accepted, remarked, held, openQuestions, createdAt } = ensemble;
    return {
      id,
      url: ensembleUrl(id),
      name,
      series: of,
      formula,
      atoms,
      intake: { frames, accepted, remarked, held, openQuestions },
      levels: having.has(id) ? await levelsOf(id) : [],
      createdAt: createdAt.toISOString(),
    };
  });
  return {
    ensembles: await Promise.all(listed),
    page,
    pages: Math.max(1, Math.ceil(total / PAGE_SIZE)),
    total,
  };
}

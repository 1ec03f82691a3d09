import { and, desc, eq, inArray, type SQL, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { columns, ensembles, jobs, sifts } from "../../db/schema.server.ts";
import type { SiftRecipe } from "../../lib/recipe/recipe.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import type { SiftStatus, SiftView } from "../../lib/views.ts";
import { siftInputSha } from "../ensembles/accepted-frames.server.ts";
import { findBatchRanges, withFoundIn } from "../ensembles/batches.server.ts";
import { notFound } from "../http.server.ts";
import { pairsHere, progressHere } from "../jobs/state.server.ts";

/** A sift with the state of its job, without its result. */
export interface FoundSift {
  id: string;
  ensembleId: string;
  jobId: string;
  recipe: SiftRecipe;
  status: SiftStatus;
  progress: number;
  error: string | null;
  keptCount: number | null;
  summary: { shares: number[]; lowest: number | null; effectiveCount: number | null } | null;
  createdAt: Date;
  /** Of the molecule and its coordinates then; null on sifts of older versions. */
  geometrySha: Buffer | null;
  /** False where frames were held, released or read again, or the level's numbers replaced, since. */
  current: boolean;
}

const fields = {
  id: sifts.id,
  ensembleId: sifts.ensembleId,
  jobId: sifts.jobId,
  recipe: sifts.recipe,
  status: jobs.state,
  progress: jobs.progress,
  error: jobs.error,
  keptCount: sifts.keptCount,
  summary: sifts.summary,
  inputSha: sifts.inputSha,
  geometrySha: sifts.geometrySha,
  createdAt: sifts.createdAt,
  acceptedSha: ensembles.acceptedSha,
};

/** When a sift was asked for last: going back to earlier settings makes an old one the newest. */
export const lastAsked = sql`coalesce(${sifts.askedAt}, ${sifts.createdAt})`;

/** Sifts with their state, the one asked for last first. */
async function find(where: SQL | undefined, on: Queryable): Promise<FoundSift[]> {
  const rows = await on
    .select(fields)
    .from(sifts)
    .innerJoin(jobs, eq(jobs.id, sifts.jobId))
    .innerJoin(ensembles, eq(ensembles.id, sifts.ensembleId))
    .where(where)
    .orderBy(desc(lastAsked), desc(sifts.id));
  const levels = await levelsOf([...new Set(rows.map((row) => row.ensembleId))], on);
  return rows.map(({ inputSha, acceptedSha, ...row }) => {
    const level = row.recipe.level === null ? null : levels.get(row.recipe.level);
    const now = level === undefined ? null : siftInputSha(acceptedSha ?? Buffer.alloc(32), level);
    const here = row.status === "running" ? progressHere(row.jobId) : null;
    return {
      ...row,
      progress: row.status === "done" ? 1 : Math.max(here ?? 0, row.progress),
      current: now !== null && inputSha !== null && now.equals(inputSha),
    };
  });
}

async function levelsOf(ensembleIds: string[], on: Queryable) {
  if (ensembleIds.length === 0) return new Map<string, { dataSha: Buffer; unit: string | null }>();
  const rows = await on
    .select({ id: columns.id, dataSha: columns.dataSha, unit: columns.unit })
    .from(columns)
    .where(and(inArray(columns.ensembleId, ensembleIds), eq(columns.kind, "energy")));
  return new Map(
    rows.map((row) => [row.id, { dataSha: row.dataSha ?? Buffer.alloc(32), unit: row.unit }] as const),
  );
}

/** One sift by its id; access has been decided before. */
export async function findSift(siftId: string, on: Queryable = db): Promise<FoundSift> {
  const found = (await find(eq(sifts.id, siftId), on))[0];
  if (found === undefined) throw notFound();
  return found;
}

/** All sifts of the ensembles, newest first. */
export async function findSiftsOf(ensembleIds: string[]): Promise<FoundSift[]> {
  return ensembleIds.length === 0 ? [] : find(inArray(sifts.ensembleId, ensembleIds), db);
}

/** The sift that stands for an ensemble: done on its frames as they are, else on the way, else the newest done. */
export function chooseSift(newestFirst: readonly FoundSift[]): FoundSift | null {
  const underWay = (sift: FoundSift) => sift.status === "queued" || sift.status === "running";
  return (
    newestFirst.find((sift) => sift.current && sift.status === "done") ??
    newestFirst.find((sift) => sift.current && underWay(sift)) ??
    newestFirst.find((sift) => sift.status === "done") ??
    newestFirst[0] ??
    null
  );
}

/** The sift that guests are shown: the one that intake started, whatever members try later. */
export function chooseFirstSift(newestFirst: readonly FoundSift[]): FoundSift | null {
  const done = newestFirst
    .filter((sift) => sift.current && sift.status === "done")
    .toSorted((a, b) => a.createdAt.getTime() - b.createdAt.getTime());
  return done[0] ?? chooseSift(newestFirst);
}

/** The stored result of a sift; null until it is done. */
export async function readResult(siftId: string): Promise<SiftResult | null> {
  const rows = await db.select({ result: sifts.result }).from(sifts).where(eq(sifts.id, siftId)).limit(1);
  const text = rows[0]?.result;
  // Written by `finishSift` alone, from the typed result of the computation.
  return text == null ? null : (JSON.parse(text) as SiftResult);
}

/** A sift with its result, unless only its state is asked for, as pages and the API show it. */
export async function toSiftView(sift: FoundSift, { stateOnly = false } = {}): Promise<SiftView> {
  const result = sift.status === "done" && !stateOnly ? await readResult(sift.id) : null;
  return {
    id: sift.id,
    status: sift.status,
    progress: sift.progress,
    ...(sift.status === "running" ? { pairs: pairsHere(sift.jobId) ?? 0 } : {}),
    recipe: sift.recipe,
    result: result && withFoundIn(result, await findBatchRanges(sift.ensembleId)),
    error: sift.error,
    createdAt: sift.createdAt.toISOString(),
    current: sift.current,
  };
}

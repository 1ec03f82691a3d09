import { and, asc, eq } from "drizzle-orm";
import { db, type Queryable, type Transaction } from "../../db/client.server.ts";
import { batches, ensembleFiles, type ensembles, sources } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import type { WrittenAnswers } from "./complete-reading.server.ts";
import { ensembleUrl } from "./describe-ensemble.server.ts";
import { filesSha } from "./same-files.server.ts";

type EnsembleRow = typeof ensembles.$inferSelect;

/** The checksum of the first upload's files, as taking in made it; null where one of them is gone. */
export async function firstFilesSha(tx: Queryable, ensembleId: string): Promise<Buffer | null> {
  const rows = await tx
    .select({ sha: sources.sha256, sourceId: sources.id })
    .from(ensembleFiles)
    .innerJoin(sources, eq(sources.id, ensembleFiles.sourceId))
    .where(and(eq(ensembleFiles.ensembleId, ensembleId), eq(ensembleFiles.batch, 0)))
    .orderBy(asc(ensembleFiles.position));
  // Entries of one archive are rows of one source.
  const own = rows.filter(({ sourceId }, k) => sourceId !== rows[k - 1]?.sourceId);
  const shas = own.flatMap(({ sha }) => (sha === null ? [] : [sha]));
  return shas.length > 0 && shas.length === own.length ? filesSha(shas) : null;
}

/** Writes the row of the first upload where an older version did not. */
export async function ensureFirstBatch(tx: Transaction, ensemble: EnsembleRow): Promise<void> {
  const known = await tx
    .select({ batch: batches.batch })
    .from(batches)
    .where(and(eq(batches.ensembleId, ensemble.id), eq(batches.batch, 0)));
  const sha = known.length > 0 ? null : await firstFilesSha(tx, ensemble.id);
  if (sha === null) return;
  await tx.insert(batches).values({
    ensembleId: ensemble.id,
    batch: 0,
    filesSha: sha,
    answers: ensemble.answers,
    createdBy: ensemble.createdBy,
    createdByToken: ensemble.createdByToken,
    createdAt: ensemble.createdAt,
  });
}

/** The batch of an ensemble that the same files made; the first upload counts as one. */
export async function findSameBatch(
  on: Queryable,
  ensembleId: string,
  sha: Buffer,
): Promise<{ batch: number; answers: WrittenAnswers } | null> {
  const rows = await on
    .select({ batch: batches.batch, answers: batches.answers })
    .from(batches)
    .where(and(eq(batches.ensembleId, ensembleId), eq(batches.filesSha, sha)))
    .limit(1);
  if (rows[0]) return rows[0];
  const first = await firstFilesSha(on, ensembleId);
  return first?.equals(sha) ? { batch: 0, answers: NOTHING_SAID } : null;
}

const NOTHING_SAID: WrittenAnswers = {
  energyUnit: null,
  energyFrom: null,
  level: null,
  energyKind: "electronic",
  energyTemperature: null,
};
const COUNTED = ["energyUnit", "energyFrom", "level"] as const;

/**
 * The same files once more: nothing is added. What was left open then and now is no other answer, for it was taken from
 * the ensemble.
 *
 * @throws DomainError conflict where an answer was given that differs from the one given before
 */
export function checkSameBatch(
  ensembleId: string,
  known: { batch: number; answers: WrittenAnswers },
  answers: WrittenAnswers,
): void {
  const differs = COUNTED.filter(
    (field) =>
      answers[field] !== null && known.answers[field] !== null && answers[field] !== known.answers[field],
  );
  if (differs.length === 0) return;
  const url = ensembleUrl(ensembleId);
  const faults = differs.map((field) => ({
    field,
    message: `${known.answers[field]} when they were added, ${answers[field]} now.`,
  }));
  throw new DomainError(
    "conflict",
    "The same files with other answers",
    `These files are in this ensemble already, as batch ${known.batch + 1}, with other answers.`,
    { faults, extra: { existing: ensembleId, url } },
  );
}

/** First and last frame number of each batch, in order; one entry where nothing was ever added. */
export async function findBatchRanges(
  ensembleId: string,
): Promise<{ batch: number; firstFrame: number; frames: number }[]> {
  return db
    .select({
      batch: ensembleFiles.batch,
      firstFrame: ensembleFiles.firstFrame,
      frames: ensembleFiles.frames,
    })
    .from(ensembleFiles)
    .where(eq(ensembleFiles.ensembleId, ensembleId))
    .orderBy(asc(ensembleFiles.position));
}

/**
 * Says for every kept conformer which search found it how often; nothing where there was one search only.
 *
 * @param ranges frame numbers of the files of each batch, in order
 */
export function withFoundIn(
  result: SiftResult,
  ranges: readonly { batch: number; firstFrame: number; frames: number }[],
): SiftResult {
  if (!ranges.some(({ batch }) => batch > 0)) return result;
  const last = ranges.at(-1);
  const batches = new Int32Array(last ? last.firstFrame + last.frames : 0);
  for (const { batch, firstFrame, frames } of ranges) batches.fill(batch, firstFrame, firstFrame + frames);
  const batchOf = (frame: number) => batches[frame] ?? 0;
  const counts = new Map(result.kept.map(({ frame }) => [frame, new Map([[batchOf(frame), 1]])]));
  for (const { frame, repeats } of result.dropped) {
    const own = counts.get(repeats);
    const batch = batchOf(frame);
    own?.set(batch, (own.get(batch) ?? 0) + 1);
  }
  const foundIn = (frame: number) =>
    [...(counts.get(frame) ?? [])]
      .sort(([a], [b]) => a - b)
      .map(([batch, found]) => ({ batch: batch + 1, found }));
  return { ...result, kept: result.kept.map((one) => ({ ...one, foundIn: foundIn(one.frame) })) };
}

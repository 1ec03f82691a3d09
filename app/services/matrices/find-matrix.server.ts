import { eq } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { isId } from "../../db/new-id.server.ts";
import { jobs, pairMatrices } from "../../db/schema.server.ts";
import { packedLength } from "../../lib/align/pair-matrix.ts";
import type { SiftStatus } from "../../lib/views.ts";
import { type Actor, accessEnsemble, type Verb } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { cancelJob } from "../jobs/cancel-job.server.ts";
import { pairsHere, progressHere } from "../jobs/state.server.ts";
import { waitForJob } from "../jobs/wait-for-job.server.ts";
import { matrixNumbersSchema } from "./matrix-recipe.ts";

/** A pair matrix with the state of its job. */
export interface MatrixState {
  id: string;
  status: SiftStatus;
  progress: number;
  /** Pairs compared so far, and in all. */
  pairs: number;
  of: number;
  error: string | null;
}

async function rowOf(matrixId: string, on: Queryable) {
  const rows = await on
    .select({
      id: pairMatrices.id,
      ensembleId: pairMatrices.ensembleId,
      numbers: pairMatrices.numbers,
      jobId: pairMatrices.jobId,
      status: jobs.state,
      progress: jobs.progress,
      error: jobs.error,
    })
    .from(pairMatrices)
    .innerJoin(jobs, eq(jobs.id, pairMatrices.jobId))
    .where(eq(pairMatrices.id, matrixId))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  return { ...row, numbers: matrixNumbersSchema.parse(row.numbers) };
}

/** State of a matrix; access has been decided before. */
export async function findMatrix(matrixId: string, on: Queryable = db): Promise<MatrixState> {
  const { id, jobId, status, progress, error, numbers } = await rowOf(matrixId, on);
  const of = packedLength(numbers.length);
  const here = status === "running" ? progressHere(jobId) : null;
  const share = status === "done" ? 1 : (here ?? progress);
  const pairs = status === "done" ? of : (pairsHere(jobId) ?? Math.round(share * of));
  return { id, status, progress: share, pairs, of, error };
}

/** A matrix by its id, for who may do this to its ensemble. */
export async function accessMatrix(actor: Actor, verb: Verb, matrixId: string) {
  if (!isId(matrixId)) throw notFound();
  const row = await rowOf(matrixId, db);
  await accessEnsemble(actor, verb, row.ensembleId);
  return row;
}

/** The state of a matrix, after waiting for its end where asked to. */
export async function getMatrix(options: {
  actor: Actor;
  matrixId: string;
  waitSeconds: number;
  signal?: AbortSignal;
}): Promise<MatrixState> {
  const { jobId, status } = await accessMatrix(options.actor, "read", options.matrixId);
  if (options.waitSeconds > 0 && (status === "queued" || status === "running")) {
    await waitForJob(jobId, 1000 * options.waitSeconds, options.signal);
  }
  return findMatrix(options.matrixId);
}

/** Cancels a matrix that waits or is computed; one that has ended stays as it is. */
export async function cancelMatrix(options: { actor: Actor; matrixId: string }): Promise<MatrixState> {
  const { jobId } = await accessMatrix(options.actor, "compute", options.matrixId);
  await cancelJob(jobId);
  return findMatrix(options.matrixId);
}

import { eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../../db/client.server.ts";
import { ensembles, pairMatrices } from "../../../db/schema.server.ts";
import { packedLength } from "../../../lib/align/pair-matrix.ts";
import { frameIndices } from "../../ensembles/frame-indices.server.ts";
import { loadPositions } from "../../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../../ensembles/molecule.server.ts";
import { finishMatrix } from "../../matrices/finish-matrix.server.ts";
import { matrixNumbersSchema, matrixRecipeSchema } from "../../matrices/matrix-recipe.ts";
import { matrixJob } from "../definitions/matrix.ts";
import { type JobRun, JobStopped } from "../job-run.ts";
import { computeMatrix } from "../pool.server.ts";

async function loadInput(tx: Transaction, matrixId: string) {
  const rows = await tx
    .select({ recipe: pairMatrices.recipe, numbers: pairMatrices.numbers, ensemble: ensembles })
    .from(pairMatrices)
    .innerJoin(ensembles, eq(ensembles.id, pairMatrices.ensembleId))
    .where(eq(pairMatrices.id, matrixId));
  const row = rows[0];
  if (row === undefined) throw new Error(`Pair matrix ${matrixId} is gone.`);
  const { ensemble } = row;
  const numbers = matrixNumbersSchema.parse(row.numbers);
  const { version: _, ...recipe } = matrixRecipeSchema.parse(row.recipe);
  const indices = await frameIndices(tx, ensemble.id, numbers);
  const { elements, isotopes, bonds } = unpackMolecule(ensemble);
  const loaded = await loadPositions(ensemble.id, ensemble.atoms, indices, tx);
  const positions = new Float64Array(new SharedArrayBuffer(loaded.byteLength));
  positions.set(loaded);
  return { elements, isotopes, bonds, atoms: ensemble.atoms, positions, recipe, count: numbers.length };
}

/** Loads, computes in threads over one shared buffer, stores. */
export async function runMatrixJob(run: JobRun): Promise<void> {
  const { matrixId } = matrixJob.payload.parse(run.payload);
  const { count, ...input } = await inTransaction((tx) => loadInput(tx, matrixId));
  const matrix = new Float32Array(new SharedArrayBuffer(4 * packedLength(count)));
  const counters = new Int32Array(new SharedArrayBuffer(12));
  const answer = await computeMatrix(
    { ...input, matrix, counters, cancel: run.cancel },
    { progress: run.progress, signal: run.signal },
  );
  if (answer.kind === "cancelled") throw new JobStopped(`Pair matrix ${matrixId} was stopped.`);
  await finishMatrix({ matrixId, jobId: run.jobId, holder: run.holder, matrix });
}

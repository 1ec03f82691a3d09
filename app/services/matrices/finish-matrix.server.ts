import { eq } from "drizzle-orm";
import { db, inTransaction } from "../../db/client.server.ts";
import { insertMatrixBlock } from "../../db/queries/insert-blobs.server.ts";
import { pairMatrixBlocks } from "../../db/schema.server.ts";
import { finishJob } from "../jobs/finish-job.server.ts";

/** Floats of a block: 1 MB. */
const BLOCK_FLOATS = 2 ** 18;

/**
 * Stores a matrix in blocks and ends its job: who reads it asks the job first, so that half of it is never seen.
 *
 * @throws JobLost where the job was cancelled or taken over meanwhile
 */
export async function finishMatrix(finished: {
  matrixId: string;
  jobId: string;
  holder: string;
  matrix: Float32Array;
}): Promise<void> {
  const { matrixId, jobId, holder, matrix } = finished;
  // What an earlier try left behind.
  await db.delete(pairMatrixBlocks).where(eq(pairMatrixBlocks.matrixId, matrixId));
  const bytes = Buffer.from(matrix.buffer, matrix.byteOffset, matrix.byteLength);
  for (let position = 0; position * BLOCK_FLOATS < matrix.length; position++) {
    const from = 4 * BLOCK_FLOATS * position;
    await insertMatrixBlock({ matrixId, position, data: bytes.subarray(from, from + 4 * BLOCK_FLOATS) });
  }
  await inTransaction((tx) => finishJob(tx, jobId, holder));
}

import { pool } from "../client.server.ts";

// Prepared statements send bytes as they are; the query builder would write them as text, twice as long and three
// times as slow.

/** One compressed piece of an original file. */
export async function insertSourceChunk(row: {
  sourceId: string;
  position: number;
  data: Buffer;
}): Promise<void> {
  await pool().execute("insert into source_chunks (source_id, position, data) values (?, ?, ?)", [
    row.sourceId,
    row.position,
    row.data,
  ]);
}

/** One block of packed coordinates. */
export async function insertFrameBlock(row: {
  ensembleId: string;
  shape: number;
  first: number;
  count: number;
  data: Buffer;
  sha256: Buffer;
}): Promise<void> {
  await pool().execute(
    "insert into frame_blocks (ensemble_id, shape, first, count, data, sha256) values (?, ?, ?, ?, ?, ?)",
    [row.ensembleId, row.shape, row.first, row.count, row.data, row.sha256],
  );
}

/** One block of a pair matrix. */
export async function insertMatrixBlock(row: {
  matrixId: string;
  position: number;
  data: Buffer;
}): Promise<void> {
  await pool().execute("insert into pair_matrix_blocks (matrix_id, position, data) values (?, ?, ?)", [
    row.matrixId,
    row.position,
    row.data,
  ]);
}

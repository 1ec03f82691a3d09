import { and, asc, eq } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { frameBlocks } from "../../db/schema.server.ts";

/**
 * Coordinates of frames of the ensemble's own molecule, in the order asked, read block by block.
 *
 * @param indices of the frames within shape 0
 * @returns packed [frame][atom][x, y, z] in Å
 * @throws Error when a block is missing: the database lost what it had acknowledged
 */
export async function loadPositions(
  ensembleId: string,
  atoms: number,
  indices: ArrayLike<number>,
  on: Queryable = db,
): Promise<Float64Array> {
  const length = atoms * 3;
  const positions = new Float64Array(indices.length * length);
  const wanted = Array.from({ length: indices.length }, (_, row) => row).sort(
    (a, b) => (indices[a] ?? 0) - (indices[b] ?? 0),
  );
  const blocks = await on
    .select({ first: frameBlocks.first, count: frameBlocks.count })
    .from(frameBlocks)
    .where(and(eq(frameBlocks.ensembleId, ensembleId), eq(frameBlocks.shape, 0)))
    .orderBy(asc(frameBlocks.first));
  let next = 0;
  for (const { first, count } of blocks) {
    const begin = next;
    while (next < wanted.length && (indices[wanted[next] ?? 0] ?? 0) < first + count) next += 1;
    if (next === begin) continue;
    const block = await readBlock(on, ensembleId, first);
    for (const row of wanted.slice(begin, next)) {
      const from = ((indices[row] ?? 0) - first) * length;
      positions.set(block.subarray(from, from + length), row * length);
    }
  }
  if (next < wanted.length) throw new Error(`Coordinates of ensemble ${ensembleId} are missing.`);
  return positions;
}

async function readBlock(on: Queryable, ensembleId: string, first: number): Promise<Float64Array> {
  const rows = await on
    .select({ data: frameBlocks.data })
    .from(frameBlocks)
    .where(
      and(eq(frameBlocks.ensembleId, ensembleId), eq(frameBlocks.shape, 0), eq(frameBlocks.first, first)),
    );
  const data = rows[0]?.data;
  if (data === undefined) throw new Error(`A block of ensemble ${ensembleId} is missing.`);
  // The driver's buffer may begin at any byte; doubles begin at a multiple of eight.
  return new Float64Array(data.buffer.slice(data.byteOffset, data.byteOffset + data.byteLength));
}

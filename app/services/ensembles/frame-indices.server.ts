import { and, eq, inArray } from "drizzle-orm";
import type { Queryable } from "../../db/client.server.ts";
import { frames } from "../../db/schema.server.ts";

/**
 * Where frames stand within the ensemble's own molecule, in the order asked.
 *
 * @throws RangeError for a frame that is not there or has other atoms
 */
export async function frameIndices(
  on: Queryable,
  ensembleId: string,
  numbers: number[],
): Promise<Int32Array> {
  const rows = await on
    .select({ number: frames.number, index: frames.indexInShape })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), eq(frames.shape, 0), inArray(frames.number, numbers)));
  const known = new Map(
    rows.flatMap(({ number, index }) => (index === null ? [] : [[number, index] as const])),
  );
  return Int32Array.from(numbers, (number) => {
    const index = known.get(number);
    if (index === undefined) throw new RangeError(`Frame ${number} is not among the ensemble's own.`);
    return index;
  });
}

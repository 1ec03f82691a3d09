import { and, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { pairMatrixBlocks } from "../../db/schema.server.ts";
import { DomainError } from "../../lib/errors.ts";
import type { Actor } from "../auth/access.server.ts";
import { whileAllowed } from "../while-allowed.ts";
import { accessMatrix } from "./find-matrix.server.ts";

/** Decimals of an RMSD of 32 bits: what lies beyond is its rounding. */
const DIGITS = 6;

/**
 * The distances of all pairs as CSV, in pieces: `frame,other,rmsd [Å]`, row by row of the upper triangle.
 *
 * @throws DomainError conflict while it is not done
 */
export async function exportMatrix(options: { actor: Actor; matrixId: string }) {
  const { status, numbers } = await accessMatrix(options.actor, "read", options.matrixId);
  if (status !== "done") {
    throw new DomainError("conflict", "The distances are not there yet", "Wait until they are computed.");
  }
  const still = () => accessMatrix(options.actor, "read", options.matrixId);
  return { count: numbers.length, lines: whileAllowed(csvLines(options.matrixId, numbers), still) };
}

async function* csvLines(matrixId: string, numbers: readonly number[]): AsyncGenerator<string> {
  yield "frame,other,rmsd [Å]\r\n";
  const count = numbers.length;
  let [i, j] = [0, 1];
  for (let position = 0; i < count - 1; position++) {
    const block = await readBlock(matrixId, position);
    let text = "";
    for (const rmsd of block) {
      text += `${numbers[i]},${numbers[j]},${rmsd.toFixed(DIGITS)}\r\n`;
      j += 1;
      if (j === count) {
        i += 1;
        j = i + 1;
      }
      if (text.length > 1 << 16) {
        yield text;
        text = "";
      }
    }
    if (text !== "") yield text;
  }
}

async function readBlock(matrixId: string, position: number): Promise<Float32Array> {
  const rows = await db
    .select({ data: pairMatrixBlocks.data })
    .from(pairMatrixBlocks)
    .where(and(eq(pairMatrixBlocks.matrixId, matrixId), eq(pairMatrixBlocks.position, position)));
  const data = rows[0]?.data;
  if (data === undefined) throw new Error(`A block of pair matrix ${matrixId} is missing.`);
  return new Float32Array(data.buffer.slice(data.byteOffset, data.byteOffset + data.byteLength));
}

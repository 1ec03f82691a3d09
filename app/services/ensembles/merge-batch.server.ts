import { and, eq, ne, sql } from "drizzle-orm";
import type { Transaction } from "../../db/client.server.ts";
import {
  ensembleFiles,
  ensembles,
  frameBlocks,
  frames,
  intakeMessages,
  questions,
} from "../../db/schema.server.ts";
import type { NewColumn } from "../../lib/intake/settle-energies.ts";
import { extendColumns } from "./extend-columns.server.ts";
import { insertMessages } from "./intake-rows.server.ts";
import { judgeSpread } from "./judge-spread.server.ts";
import type { ReadResult } from "./reading.server.ts";

type Target = Pick<typeof ensembles.$inferSelect, "id" | "frames">;

/** Frames of the ensemble's own shape, and the highest number of any shape. */
async function shapesOf(tx: Transaction, ensembleId: string): Promise<{ own: number; last: number }> {
  const rows = await tx
    .select({
      own: sql<string | null>`sum(${frames.shape} = 0)`,
      last: sql<number | null>`max(${frames.shape})`,
    })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId));
  return { own: Number(rows[0]?.own ?? 0), last: rows[0]?.last ?? 0 };
}

/** Frames of the group go behind those of shape 0, the others into shapes of their own. */
async function placeShapes(
  tx: Transaction,
  readId: string,
  shape: number | null,
  target: Target,
): Promise<void> {
  const { own, last } = await shapesOf(tx, target.id);
  const group = shape ?? -1;
  const base = last + 1;
  const ofFrames = eq(frames.ensembleId, readId);
  const ofBlocks = eq(frameBlocks.ensembleId, readId);
  await tx
    .update(frames)
    .set({ indexInShape: sql`${frames.indexInShape} + ${own}` })
    .where(and(ofFrames, eq(frames.shape, group)));
  await tx
    .update(frames)
    .set({ shape: sql`if(${frames.shape} = ${group}, 0, ${frames.shape} + ${base})` })
    .where(ofFrames);
  // By way of numbers beyond all in use: a statement that moves rows onto one another's places would fail.
  const away = 1_000_000;
  await tx
    .update(frameBlocks)
    .set({ shape: sql`if(${frameBlocks.shape} = ${group}, ${2 * away}, ${frameBlocks.shape} + ${away})` })
    .where(ofBlocks);
  await tx
    .update(frameBlocks)
    .set({ shape: 0, first: sql`${frameBlocks.first} + ${own}` })
    .where(and(ofBlocks, eq(frameBlocks.shape, 2 * away)));
  await tx
    .update(frameBlocks)
    .set({ shape: sql`${frameBlocks.shape} - ${away} + ${base}` })
    .where(and(ofBlocks, ne(frameBlocks.shape, 0)));
}

async function moveMessages(tx: Transaction, readId: string, targetId: string): Promise<void> {
  const rows = await tx
    .select({ last: sql<number | null>`max(${intakeMessages.position})` })
    .from(intakeMessages)
    .where(eq(intakeMessages.ensembleId, targetId));
  const next = (rows[0]?.last ?? -1) + 1;
  await tx
    .update(intakeMessages)
    .set({ ensembleId: targetId, position: sql`${intakeMessages.position} + ${next}` })
    .where(eq(intakeMessages.ensembleId, readId));
}

/**
 * Joins a read batch to an ensemble: frames, coordinates, messages and files move over, columns grow. The row in flight
 * goes. Counts and checksum of the ensemble are the caller's to take anew.
 *
 * @param target with the number of its frames before
 */
export async function mergeBatch(
  tx: Transaction,
  target: Target,
  read: {
    ensembleId: string;
    result: Pick<ReadResult, "shape" | "frames" | "files">;
    columns: readonly NewColumn[];
  },
): Promise<void> {
  const { result } = read;
  await placeShapes(tx, read.ensembleId, result.shape, target);
  for (const table of [frames, frameBlocks, ensembleFiles, questions]) {
    await tx.update(table).set({ ensembleId: target.id }).where(eq(table.ensembleId, read.ensembleId));
  }
  await moveMessages(tx, read.ensembleId, target.id);
  const counts = { before: target.frames, now: target.frames + result.frames };
  const said = await extendColumns(tx, target.id, counts, read.columns, result.files[0]?.name ?? "");
  await insertMessages(tx, target.id, said);
  await judgeSpread(tx, target, read.columns, result.files[0]?.name ?? "");
  await tx.delete(ensembles).where(eq(ensembles.id, read.ensembleId));
}

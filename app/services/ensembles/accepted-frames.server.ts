import { createHash } from "node:crypto";
import { and, asc, eq, sql } from "drizzle-orm";
import { db, type Queryable } from "../../db/client.server.ts";
import { ensembles, frameBlocks, frames } from "../../db/schema.server.ts";
import { unpackPresence } from "../../lib/column-data.ts";

/** Frames of the ensemble's own molecule that a computation may use. */
export interface AcceptedFrames {
  /** Frame numbers from 1, ascending. */
  numbers: Int32Array;
  /** Index of each within shape 0. */
  indices: Int32Array;
}

/**
 * One character a frame in file order: "1" accepted (remarked ones too), "0" held, "-" of other atoms or unreadable.
 * One string from the server instead of tens of thousands of rows.
 */
async function stateText(on: Queryable, ensembleId: string): Promise<string> {
  const mark = sql`if(${frames.shape} = 0, if(${frames.state} = 'held', '0', '1'), '-')`;
  const rows = await on
    .select({ text: sql<string | null>`group_concat(${mark} order by ${frames.number} separator '')` })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId));
  return rows[0]?.text ?? "";
}

/** One character a frame in file order: a accepted, r remarked, h held. */
export async function frameStrip(ensembleId: string): Promise<string> {
  const rows = await db
    .select({
      text: sql<string | null>`group_concat(left(${frames.state}, 1) order by ${frames.number} separator '')`,
    })
    .from(frames)
    .where(eq(frames.ensembleId, ensembleId));
  return rows[0]?.text ?? "";
}

/** Which frames a computation may use, and where their coordinates lie. */
export async function acceptedFrames(ensembleId: string, on: Queryable = db): Promise<AcceptedFrames> {
  const text = await stateText(on, ensembleId);
  const numbers: number[] = [];
  const indices: number[] = [];
  let index = 0;
  for (let at = 0; at < text.length; at++) {
    const mark = text[at];
    if (mark === "1") {
      numbers.push(at + 1);
      indices.push(index);
    }
    if (mark !== "-") index += 1;
  }
  return { numbers: Int32Array.from(numbers), indices: Int32Array.from(indices) };
}

/**
 * The checksum that names the accepted frames: elements, bonds, coordinates and which of them are accepted. It moves
 * with holds and releases and comes back when they are undone.
 */
export async function acceptedSha(tx: Queryable, ensembleId: string): Promise<Buffer> {
  const molecule = await tx
    .select({ elements: ensembles.elements, bonds: ensembles.bonds })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  const blocks = await tx
    .select({ sha256: frameBlocks.sha256 })
    .from(frameBlocks)
    .where(and(eq(frameBlocks.ensembleId, ensembleId), eq(frameBlocks.shape, 0)))
    .orderBy(asc(frameBlocks.first));
  const hash = createHash("sha256").update("accepted frames 1\n");
  for (const { elements, bonds } of molecule) hash.update(elements).update("\n").update(bonds).update("\n");
  for (const { sha256 } of blocks) hash.update(sha256 ?? "");
  return hash.update(await stateText(tx, ensembleId)).digest();
}

/** Molecule and coordinates in the order of their blocks, hashed on block by block. */
async function geometryHash(on: Queryable, ensembleId: string) {
  const molecule = await on
    .select({ elements: ensembles.elements, bonds: ensembles.bonds })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  const blocks = await on
    .select({ sha256: frameBlocks.sha256 })
    .from(frameBlocks)
    .where(and(eq(frameBlocks.ensembleId, ensembleId), eq(frameBlocks.shape, 0)))
    .orderBy(asc(frameBlocks.first));
  const hash = createHash("sha256").update("geometry 1\n");
  for (const { elements, bonds } of molecule) hash.update(elements).update("\n").update(bonds).update("\n");
  return { hash, blocks: blocks.map(({ sha256 }) => sha256 ?? Buffer.alloc(32)) };
}

/** The checksum of the molecule and of the coordinates of all its frames, held ones too: no decision on a frame moves it. */
export async function geometrySha(on: Queryable, ensembleId: string): Promise<Buffer> {
  const { hash, blocks } = await geometryHash(on, ensembleId);
  for (const block of blocks) hash.update(block);
  return hash.digest();
}

/** Whether the coordinates that a checksum was taken of are there still; further batches stand behind them. */
export async function hasGeometry(on: Queryable, ensembleId: string, sha: Buffer): Promise<boolean> {
  const { hash, blocks } = await geometryHash(on, ensembleId);
  return blocks.some((block) => hash.update(block).copy().digest().equals(sha));
}

/** The checksum of what a sift runs on: the accepted frames and, with a level, its numbers and their unit. */
export function siftInputSha(
  accepted: Buffer,
  level: { dataSha: Buffer; unit: string | null } | null,
): Buffer {
  const hash = createHash("sha256").update("sift input 1\n").update(accepted);
  if (level) hash.update(level.dataSha).update(level.unit ?? "");
  return hash.digest();
}

/** How many accepted frames have a value in a column, from its presence bits and the frame strip. */
export function countPresent(bits: Uint8Array, strip: string): { count: number; missing: number } {
  const present = unpackPresence(bits, strip.length);
  let count = 0;
  let accepted = 0;
  for (let at = 0; at < strip.length; at++) {
    if (strip[at] === "h") continue;
    accepted += 1;
    if (present[at] === 1) count += 1;
  }
  return { count, missing: accepted - count };
}

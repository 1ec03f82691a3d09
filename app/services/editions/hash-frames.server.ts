import { createHash } from "node:crypto";
import { setImmediate as breathe } from "node:timers/promises";
import type { Graph } from "../../lib/structure.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";

/** Doubles read and hashed before others get a turn. */
const DOUBLES_AT_ONCE = 500_000;

/**
 * The checksum of frames as a computation takes them: elements, isotopes, bonds, numbers and coordinates. Unlike that of
 * the accepted frames it does not move when frames are held or released later.
 *
 * @param indices of the frames within shape 0, in the order of `numbers`
 */
export async function hashFrames(
  ensembleId: string,
  graph: Graph,
  numbers: readonly number[],
  indices: readonly number[],
): Promise<string> {
  const atoms = graph.elements.length;
  const hash = createHash("sha256").update("edition frames 1\n");
  hash.update(graph.elements).update(bytesOf(graph.isotopes)).update(bytesOf(graph.bonds));
  hash.update(bytesOf(Int32Array.from(numbers)));
  const step = Math.max(1, Math.floor(DOUBLES_AT_ONCE / (3 * atoms)));
  for (let at = 0; at < indices.length; at += step) {
    hash.update(bytesOf(await loadPositions(ensembleId, atoms, indices.slice(at, at + step))));
    await breathe();
  }
  return hash.digest("hex");
}

function bytesOf(array: Uint16Array | Int32Array | Float64Array): Buffer {
  return Buffer.from(array.buffer, array.byteOffset, array.byteLength);
}

import { createHash } from "node:crypto";
import { setImmediate as breathe } from "node:timers/promises";
import { promisify } from "node:util";
import { deflateRaw, inflateRaw } from "node:zlib";
import { and, asc, eq } from "drizzle-orm";
import { db, type Transaction } from "../../db/client.server.ts";
import { editionFiles as rows } from "../../db/schema.server.ts";
import type { EditionFile } from "../../lib/edition/content.ts";
import type { WrittenFile } from "../../lib/edition/edition-files.ts";

const pack = promisify(deflateRaw);
const unpack = promisify(inflateRaw);
const CHUNK_CHARACTERS = 2 ** 20;

/** A file with its size and checksum, packed and ready to be stored. */
export interface PackedFile extends EditionFile {
  chunks: Buffer[];
}

/** Writes out a file piece by piece: counted, hashed, and packed where it is to be kept. */
export async function packFile(file: WrittenFile, keep = true): Promise<PackedFile> {
  const hash = createHash("sha256");
  const chunks: Buffer[] = [];
  let bytes = 0;
  let text = "";
  const flush = async () => {
    const piece = Buffer.from(text, "utf8");
    text = "";
    hash.update(piece);
    bytes += piece.length;
    if (keep) chunks.push(await pack(piece));
    else await breathe();
  };
  for (const piece of file.pieces) {
    text += piece;
    if (text.length >= CHUNK_CHARACTERS) await flush();
  }
  if (text !== "" || chunks.length === 0) await flush();
  return { name: file.name, bytes, sha256: hash.digest("hex"), chunks };
}

/** Stores packed files, in the transaction of the edition that they belong to. */
export async function storeFiles(
  tx: Transaction,
  editionId: string,
  files: readonly PackedFile[],
): Promise<void> {
  for (const { name, chunks } of files) {
    for (const [position, data] of chunks.entries()) {
      await tx.insert(rows).values({ editionId, name, position, data });
    }
  }
}

/** A stored file, chunk by chunk, as it was handed out first. */
export async function* readFile(
  editionId: string,
  name: string,
): AsyncGenerator<Uint8Array, void, undefined> {
  const at = and(eq(rows.editionId, editionId), eq(rows.name, name));
  const places = await db
    .select({ position: rows.position })
    .from(rows)
    .where(at)
    .orderBy(asc(rows.position));
  for (const { position } of places) {
    const found = await db
      .select({ data: rows.data })
      .from(rows)
      .where(and(at, eq(rows.position, position)));
    const data = found[0]?.data;
    if (data === undefined) throw new Error(`A piece of ${name} of edition ${editionId} is missing.`);
    yield await unpack(data);
  }
}

/** A whole stored file. */
export async function readWholeFile(editionId: string, name: string): Promise<Buffer> {
  const chunks: Uint8Array[] = [];
  for await (const chunk of readFile(editionId, name)) chunks.push(chunk);
  return Buffer.concat(chunks);
}

import { createHash } from "node:crypto";
import { promisify } from "node:util";
import { deflate, inflate } from "node:zlib";
import { and, asc, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { insertSourceChunk } from "../../db/queries/insert-blobs.server.ts";
import { sourceChunks, sources } from "../../db/schema.server.ts";
import { OneAhead } from "./one-ahead.ts";

const pack = promisify(deflate);
const unpack = promisify(inflate);

/** Original bytes a row: small enough for the packet limit whatever the driver adds. */
const CHUNK_BYTES = 2 ** 20;

export interface WrittenSource {
  sourceId: string;
  sha256: Buffer;
  bytes: number;
}

/**
 * Keeps the original bytes of one file while they arrive, in compressed chunks under a row that answers for no checksum
 * yet. What is never finished is invisible and swept.
 */
export class SourceWriter {
  readonly sourceId = newId();
  private readonly hash = createHash("sha256");
  private readonly teamId: string;
  private readonly ahead = new OneAhead();
  private pending: Uint8Array[] = [];
  private pendingBytes = 0;
  private position = 0;
  private bytes = 0;

  constructor(teamId: string) {
    this.teamId = teamId;
  }

  async begin(): Promise<this> {
    await db.insert(sources).values({
      id: this.sourceId,
      teamId: this.teamId,
      sha256: null,
      bytes: 0,
      chunks: 0,
      createdAt: new Date(),
    });
    return this;
  }

  get size(): number {
    return this.bytes;
  }

  async write(chunk: Uint8Array): Promise<void> {
    this.hash.update(chunk);
    this.bytes += chunk.length;
    this.pending.push(chunk);
    this.pendingBytes += chunk.length;
    if (this.pendingBytes >= CHUNK_BYTES) await this.flush();
  }

  /** Writes what is left; the row still waits for the transaction that lets it answer for its checksum. */
  async end(): Promise<WrittenSource> {
    await this.flush();
    await this.ahead.end();
    return { sourceId: this.sourceId, sha256: this.hash.digest(), bytes: this.bytes };
  }

  private async flush(): Promise<void> {
    if (this.pendingBytes === 0) return;
    const raw = Buffer.concat(this.pending);
    this.pending = [];
    this.pendingBytes = 0;
    const position = this.position++;
    const { bytes } = this;
    await this.ahead.push(() => this.store(position, raw, bytes));
  }

  private async store(position: number, raw: Buffer, bytes: number): Promise<void> {
    const { sourceId } = this;
    // Level 1: the time of arrival matters more than the last percent, and packed files do not shrink anyway.
    await insertSourceChunk({ sourceId, position, data: await pack(raw, { level: 1 }) });
    await db
      .update(sources)
      .set({ bytes, chunks: position + 1, createdAt: new Date() })
      .where(eq(sources.id, sourceId));
  }
}

/** The original bytes of a kept file, chunk by chunk. */
export async function* readSource(sourceId: string): AsyncGenerator<Uint8Array, void, undefined> {
  const positions = await db
    .select({ position: sourceChunks.position })
    .from(sourceChunks)
    .where(eq(sourceChunks.sourceId, sourceId))
    .orderBy(asc(sourceChunks.position));
  for (const { position } of positions) yield await readChunk(sourceId, position);
}

async function readChunk(sourceId: string, position: number): Promise<Uint8Array> {
  const rows = await db
    .select({ data: sourceChunks.data })
    .from(sourceChunks)
    .where(and(eq(sourceChunks.sourceId, sourceId), eq(sourceChunks.position, position)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw new Error(`Chunk ${position} of source ${sourceId} is missing.`);
  return unpack(row.data);
}

import { and, eq, inArray, isNull, ne, sum } from "drizzle-orm";
import { db, type Queryable, type Transaction } from "../../db/client.server.ts";
import { ensembleFiles, sources } from "../../db/schema.server.ts";
import { env } from "../../env.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { trimmed } from "../../lib/format.ts";
import { SourceWriter, type WrittenSource } from "./source-writer.server.ts";

/** Bytes that a team keeps, those on their way in too. */
async function keptBytes(teamId: string): Promise<number> {
  const rows = await db
    .select({ bytes: sum(sources.bytes) })
    .from(sources)
    .where(eq(sources.teamId, teamId));
  return Number(rows[0]?.bytes ?? 0);
}

function overQuota(file: string): DomainError {
  const limit = `${trimmed(env().TEAM_QUOTA_BYTES / 1e9, 1)} GB`;
  const message = `This team's files would take more than its ${limit}. Delete ensembles that nobody needs, or ask for more.`;
  return new DomainError("too-large", "The team's space is full", message, { faults: [{ file, message }] });
}

/** Keeps the original bytes of an upload's files; `discard` takes back those that never became part of an ensemble. */
export class FileStore {
  readonly written: WrittenSource[] = [];
  private readonly teamId: string;
  private readonly begun: string[] = [];
  private left = 0;

  constructor(teamId: string) {
    this.teamId = teamId;
  }

  /** @throws DomainError too-large where the team's space is full already */
  async begin(file: string): Promise<SourceWriter> {
    this.left = env().TEAM_QUOTA_BYTES - (await keptBytes(this.teamId));
    if (this.left <= 0) throw overQuota(file);
    const writer = await new SourceWriter(this.teamId).begin();
    this.begun.push(writer.sourceId);
    return writer;
  }

  /** The bytes of a file on their way to its reader; each is kept before it is read. */
  async *keep(
    file: string,
    bytes: AsyncIterable<Uint8Array>,
    writer: SourceWriter,
  ): AsyncGenerator<Uint8Array, void, undefined> {
    for await (const chunk of bytes) {
      await writer.write(chunk);
      if (writer.size > this.left) throw overQuota(file);
      yield chunk;
    }
    this.written.push(await writer.end());
  }

  /**
   * Lets the files answer for their checksums; one that the team has already is taken from there.
   *
   * @returns ids of the kept files by position
   */
  async publish(tx: Transaction): Promise<string[]> {
    const ids: string[] = [];
    for (const { sourceId, sha256 } of this.written) {
      const same = await tx
        .select({ id: sources.id })
        .from(sources)
        .where(and(eq(sources.teamId, this.teamId), eq(sources.sha256, sha256)))
        .for("update");
      const known = same[0]?.id;
      if (known === undefined) {
        await tx.update(sources).set({ sha256, createdAt: new Date() }).where(eq(sources.id, sourceId));
      }
      ids.push(known ?? sourceId);
    }
    return ids;
  }

  /** Takes back what answers for nothing. */
  async discard(): Promise<void> {
    if (this.begun.length === 0) return;
    await db.delete(sources).where(and(inArray(sources.id, this.begun), isNull(sources.sha256)));
  }
}

/**
 * Puts kept files in the place of those that an ensemble's rows name.
 *
 * @param sourceIds one a row, in order of position
 * @param first position of the first row
 */
export async function pointFiles(
  tx: Queryable,
  ensembleId: string,
  sourceIds: readonly string[],
  first = 0,
): Promise<void> {
  for (const [at, sourceId] of sourceIds.entries()) {
    const position = first + at;
    await tx
      .update(ensembleFiles)
      .set({ sourceId })
      .where(
        and(
          eq(ensembleFiles.ensembleId, ensembleId),
          eq(ensembleFiles.position, position),
          ne(ensembleFiles.sourceId, sourceId),
        ),
      );
  }
}

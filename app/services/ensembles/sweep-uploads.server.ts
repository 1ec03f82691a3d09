import { and, eq, isNull, lt, notExists } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembleFiles, ensembles, sources } from "../../db/schema.server.ts";

/** An upload shows every minute or with every megabyte that it lives. */
const ABANDONED_MS = 3_600_000;

/** Removes what uploads left behind that ended without an end: a killed process, a lost database. */
export async function sweepUploads(now = new Date()): Promise<void> {
  const before = new Date(now.getTime() - ABANDONED_MS);
  await db.delete(ensembles).where(lt(ensembles.readingSince, before));
  const used = db.select().from(ensembleFiles).where(eq(ensembleFiles.sourceId, sources.id));
  await db.delete(sources).where(and(isNull(sources.sha256), lt(sources.createdAt, before), notExists(used)));
}

import { and, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembleFiles, sources } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { whileAllowed } from "../while-allowed.ts";
import { readSource } from "./source-writer.server.ts";

/** An original file byte for byte, as a stream. */
export async function loadSource(options: {
  actor: Actor;
  ensembleId: string;
  position: number;
}): Promise<{ name: string; bytes: number; chunks: AsyncGenerator<Uint8Array, void, undefined> }> {
  const grant = await accessEnsemble(options.actor, "read-source", options.ensembleId);
  const rows = await db
    .select({ name: ensembleFiles.name, sourceId: sources.id, bytes: sources.bytes })
    .from(ensembleFiles)
    .innerJoin(sources, eq(sources.id, ensembleFiles.sourceId))
    .where(and(eq(ensembleFiles.ensembleId, grant.ensembleId), eq(ensembleFiles.position, options.position)))
    .limit(1);
  const row = rows[0];
  if (row === undefined) throw notFound();
  // Guests of the example are not members: they would fill its logbook without saying anything.
  if (grant.role !== "guest") {
    await writeEntry(db, grant, grant, { type: "source-downloaded", data: { file: row.name } });
  }
  const still = () => accessEnsemble(options.actor, "read-source", grant.ensembleId);
  return { name: row.name, bytes: row.bytes, chunks: whileAllowed(readSource(row.sourceId), still) };
}

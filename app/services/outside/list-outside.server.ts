import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { outsideStructures, sources } from "../../db/schema.server.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { type OutsideData, outsideDataSchema } from "./outside-data.ts";

export interface OutsideView {
  id: string;
  name: string;
  /** SHA-256 of the original file. */
  sha256: string;
  createdAt: string;
  data: OutsideData;
}

/** The structures from outside beside an ensemble, oldest first. */
export async function listOutside(options: { actor: Actor; ensembleId: string }): Promise<OutsideView[]> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const rows = await db
    .select({
      id: outsideStructures.id,
      name: outsideStructures.name,
      data: outsideStructures.data,
      createdAt: outsideStructures.createdAt,
      sha: sources.sha256,
    })
    .from(outsideStructures)
    .innerJoin(sources, eq(sources.id, outsideStructures.sourceId))
    .where(and(eq(outsideStructures.ensembleId, ensembleId), isNull(outsideStructures.deletedAt)))
    .orderBy(asc(outsideStructures.createdAt), asc(outsideStructures.id));
  return rows.map(({ id, name, data, createdAt, sha }) => ({
    id,
    name,
    sha256: sha?.toString("hex") ?? "",
    createdAt: createdAt.toISOString(),
    data: outsideDataSchema.parse(data),
  }));
}

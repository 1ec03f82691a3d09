import { and, desc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { ensembles } from "../../db/schema.server.ts";
import type { EnsembleView, SiftView } from "../../lib/views.ts";
import type { Actor } from "../auth/access.server.ts";
import { loadSift } from "../sifts/load-sift.server.ts";
import { loadEnsemble } from "./load-ensemble.server.ts";

/** The ensemble that anybody may look at, with its sift; null where none was made. */
export async function loadExample(options: {
  actor: Actor;
}): Promise<{ ensemble: EnsembleView; sift: SiftView | null } | null> {
  const rows = await db
    .select({ id: ensembles.id })
    .from(ensembles)
    .where(and(eq(ensembles.example, true), isNull(ensembles.deletedAt)))
    .orderBy(desc(ensembles.createdAt))
    .limit(1);
  const ensembleId = rows[0]?.id;
  if (ensembleId === undefined) return null;
  return {
    ensemble: await loadEnsemble({ actor: options.actor, ensembleId }),
    // As a guest, whoever looks: the public page shows one result to all.
    sift: await loadSift({ actor: { kind: "anonymous" }, ensembleId }),
  };
}

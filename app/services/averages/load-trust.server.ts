import { asc, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { batches, ensembleFiles } from "../../db/schema.server.ts";
import type { SearchView, TrustView } from "../../lib/trust/trust-view.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";

/** Which frames each upload of an ensemble brought: what two searches are compared by. */
export async function loadTrust(options: { actor: Actor; ensembleId: string }): Promise<TrustView> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  return { searches: await findSearches(ensembleId) };
}

/** The uploads of an ensemble as searches, in their order. Access has been decided before. */
export async function findSearches(ensembleId: string): Promise<SearchView[]> {
  const [files, named] = await Promise.all([
    db
      .select({
        batch: ensembleFiles.batch,
        name: ensembleFiles.name,
        first: ensembleFiles.firstFrame,
        frames: ensembleFiles.frames,
      })
      .from(ensembleFiles)
      .where(eq(ensembleFiles.ensembleId, ensembleId))
      .orderBy(asc(ensembleFiles.position)),
    db
      .select({ batch: batches.batch, name: batches.name })
      .from(batches)
      .where(eq(batches.ensembleId, ensembleId)),
  ]);
  const names = new Map(named.map((row) => [row.batch, row.name]));
  const searches = new Map<number, SearchView>();
  for (const file of files) {
    const known = searches.get(file.batch) ?? { name: names.get(file.batch) ?? file.name, ranges: [] };
    searches.set(file.batch, known);
    if (file.frames > 0) known.ranges.push([file.first, file.first + file.frames - 1]);
  }
  return [...searches.values()];
}

import { and, asc, eq } from "drizzle-orm";
import type { Queryable } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import type { Configuration } from "../../lib/chem/stereo.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { chiralityOf } from "./intake-rows.server.ts";
import { unpackMolecule } from "./molecule.server.ts";

/**
 * Decides again on the chirality of an ensemble whose accepted frames have changed: a centre that is flat in the lowest
 * frame makes it unsure, and another frame may be the lowest now. Runs in the transaction of the change, after it.
 */
export async function refreshChirality(tx: Queryable, ensembleId: string): Promise<void> {
  const here = eq(ensembles.id, ensembleId);
  const [ensemble] = await tx.select().from(ensembles).where(here);
  const configuration = (ensemble?.identity as { configuration?: Configuration } | null)?.configuration;
  if (ensemble === undefined || configuration === undefined) return;
  const [level] = await tx
    .select({ data: columns.data })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.kind, "energy")))
    .orderBy(asc(columns.ordinal))
    .limit(1);
  const energies = level ? { data: unpackColumn(level.data, ensemble.frames) } : null;
  const found = await chiralityOf(tx, ensembleId, unpackMolecule(ensemble), configuration, energies);
  if (found.chirality === ensemble.chirality && found.chiralityNote === ensemble.chiralityNote) return;
  await tx.update(ensembles).set(found).where(here);
}

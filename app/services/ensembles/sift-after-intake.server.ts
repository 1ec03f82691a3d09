import { and, asc, eq, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import type { Grant } from "../auth/access.server.ts";
import { log } from "../log.server.ts";
import { askForSift } from "../sifts/create-sift.server.ts";

/**
 * Asks for the first sift once frames are accepted, whatever is still open of others: the defaults at the first level, or file order without energies. A
 * failure here never fails the intake.
 */
export async function siftAfterIntake(at: Grant & { ensembleId: string }): Promise<void> {
  try {
    const rows = await db
      .select({ accepted: ensembles.accepted })
      .from(ensembles)
      .where(and(eq(ensembles.id, at.ensembleId), isNull(ensembles.deletedAt)));
    const ensemble = rows[0];
    if (ensemble === undefined || ensemble.accepted === 0) return;
    const levels = await db
      .select({ id: columns.id })
      .from(columns)
      .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.kind, "energy")))
      .orderBy(asc(columns.ordinal))
      .limit(1);
    await askForSift(at, { level: levels[0]?.id ?? null }, { automatic: true });
  } catch (error) {
    log.warn({ err: error, ensembleId: at.ensembleId }, "no sift after intake");
  }
}

/**
 * Asks for the first sift by energies once an ensemble without levels has got some: what stood in file order until then
 * says nothing of populations. A failure never fails the act that brought them.
 *
 * @param brought ids of the columns that were brought
 */
export async function siftAfterLevels(
  at: Grant & { ensembleId: string },
  brought: readonly string[],
): Promise<void> {
  const levels = await db
    .select({ id: columns.id })
    .from(columns)
    .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.kind, "energy")));
  if (levels.length === 0 || levels.some(({ id }) => !brought.includes(id))) return;
  await siftAfterIntake(at);
}

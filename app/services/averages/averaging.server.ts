import { eq, inArray } from "drizzle-orm";
import { db, type Queryable, type Transaction } from "../../db/client.server.ts";
import { averaging, users } from "../../db/schema.server.ts";
import type { SaidView } from "../../lib/averages/averages-view.ts";
import { type Averaging, NOTHING_SAID } from "../../lib/averages/averaging.ts";

/** What people said of averages of an ensemble, and how often it was changed; 0 where nobody has said anything. */
export async function findAveraging(
  ensembleId: string,
  at: Queryable = db,
): Promise<{ data: Averaging; version: number }> {
  const [row] = await at
    .select({ data: averaging.data, version: averaging.version })
    .from(averaging)
    .where(eq(averaging.ensembleId, ensembleId));
  return row ?? { data: NOTHING_SAID, version: 0 };
}

/** The groups taken apart by hand, atoms from 0, as averages take them. */
export async function findSplits(ensembleId: string): Promise<number[][][]> {
  const { data } = await findAveraging(ensembleId);
  return data.splits.map(({ parts }) => parts.map((part) => part.map((atom) => atom - 1)));
}

/** Keeps it in the place of what was there; the ensemble's row is locked by the caller. */
export async function storeAveraging(
  tx: Transaction,
  ensembleId: string,
  data: Averaging,
  before: number,
): Promise<void> {
  const row = { data, version: before + 1, changedAt: new Date() };
  await tx
    .insert(averaging)
    .values({ ensembleId, ...row })
    .onDuplicateKeyUpdate({ set: row });
}

/**
 * The same for a page, with the names of who said it.
 *
 * @param named false for guests, who read no names
 */
export async function saidView(ensembleId: string, named: boolean): Promise<SaidView> {
  const { data, version } = await findAveraging(ensembleId);
  const ids = [
    ...new Set(
      [...data.splits, ...data.measured, ...(data.properties ? [data.properties] : [])].flatMap(
        ({ by }) => by ?? [],
      ),
    ),
  ];
  const people =
    !named || ids.length === 0
      ? []
      : await db.select({ id: users.id, name: users.name }).from(users).where(inArray(users.id, ids));
  const nameOf = (id: string | null) => people.find((one) => one.id === id)?.name ?? null;
  return {
    version,
    splits: data.splits.map(({ parts, by, at }) => ({ parts, by: nameOf(by), at })),
    measured: data.measured.map(({ by, ...rest }) => ({ ...rest, by: nameOf(by) })),
    properties: data.properties && { ...data.properties, by: nameOf(data.properties.by) },
  };
}

import { and, eq, inArray } from "drizzle-orm";
import type { Transaction } from "../../db/client.server.ts";
import { columns, sources } from "../../db/schema.server.ts";
import { type ColumnToStore, rowOf } from "./store-column.server.ts";

/** What answers decide about a column, beside its numbers. */
const DECIDED = [
  "kind",
  "unit",
  "rule",
  "energyKind",
  "temperature",
  "geometryLevel",
  "solvent",
  "quantity",
  "atom",
] as const;

/**
 * Columns that storing these would leave as they are: each stands under its name, from the same bytes, with the same
 * numbers and the same answers. So a job that replaces them is run again without leaving anything behind.
 *
 * @returns their ids in the order given; null where one is not there or is another
 */
export async function standingColumns(
  tx: Transaction,
  ensembleId: string,
  sha256: Buffer,
  wanted: readonly ColumnToStore[],
): Promise<string[] | null> {
  const { id, name, dataSha, kind, unit, rule, energyKind, temperature } = columns;
  const { geometryLevel, solvent, quantity, atom } = columns;
  const found = await tx
    .select({
      ...{ id, name, dataSha, kind, unit, rule, energyKind, temperature },
      ...{ geometryLevel, solvent, quantity, atom },
    })
    .from(columns)
    .innerJoin(sources, eq(sources.id, columns.sourceId))
    .where(
      and(
        eq(columns.ensembleId, ensembleId),
        eq(sources.sha256, sha256),
        inArray(
          name,
          wanted.map((column) => column.name),
        ),
      ),
    );
  const byName = new Map(found.map((row) => [row.name, row]));
  const ids = wanted.flatMap((column) => {
    const row = byName.get(column.name);
    const made = rowOf(column);
    const same = row?.dataSha.equals(made.dataSha) && DECIDED.every((key) => row[key] === made[key]);
    return row !== undefined && same === true ? [row.id] : [];
  });
  return ids.length === wanted.length ? ids : null;
}

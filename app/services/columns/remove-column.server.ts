import { createHash } from "node:crypto";
import { and, eq } from "drizzle-orm";
import { z } from "zod";
import { inTransaction } from "../../db/client.server.ts";
import { columns, removedColumns } from "../../db/schema.server.ts";
import { packColumn, unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { recomputeComputed } from "./recompute-computed.server.ts";
import { derivedColumns } from "./recompute-derived.server.ts";
import { lockEnsemble, touchEnsemble } from "./store-column.server.ts";

interface Target {
  actor: Actor;
  ensembleId: string;
  columnId: string;
}

/** What a removed column keeps of its row, as it was written. */
const factsSchema = z.looseObject({ frames: z.number().int(), createdAt: z.string() });

/**
 * Removes a column; it can be brought back under its id within thirty days. Sifts at a removed level stay as they were
 * computed.
 *
 * @throws DomainError conflict where a formula needs it, not-found for a column of another ensemble
 */
export async function removeColumn({ actor, ensembleId, columnId }: Target): Promise<string> {
  const at = await accessEnsemble(actor, "compute", ensembleId);
  return inTransaction(async (tx) => {
    const { frames } = await lockEnsemble(tx, at);
    const own = and(eq(columns.id, columnId), eq(columns.ensembleId, at.ensembleId));
    const [row] = await tx.select().from(columns).where(own);
    if (row === undefined) throw notFound();
    const needed = (await derivedColumns(tx, at.ensembleId)).filter(({ inputs }) =>
      inputs.includes(columnId),
    );
    if (needed.length > 0) {
      const names = needed.map(({ name }) => `"${name}"`).join(", ");
      const message = `${names} ${needed.length === 1 ? "is" : "are"} computed from "${row.name}". Remove ${needed.length === 1 ? "it" : "them"} first.`;
      throw new DomainError("conflict", "A formula needs it", message, {
        faults: [{ field: "column", message }],
      });
    }
    const { data, dataSha: _, createdAt, ...facts } = row;
    await tx.insert(removedColumns).values({
      id: row.id,
      ensembleId: at.ensembleId,
      name: row.name,
      facts: { ...facts, frames, createdAt: createdAt.toISOString() },
      sourceId: row.sourceId,
      data,
      removedBy: at.userId,
      removedAt: new Date(),
    });
    await tx.delete(columns).where(own);
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, at, at, { type: "column-removed", data: { id: row.id, name: row.name } });
    return row.name;
  });
}

/** As many values as there are frames now; those that came since have none. */
function fitted(data: Uint8Array, before: number, now: number): Buffer {
  const old = unpackColumn(data, before);
  const values = new Float64Array(now);
  const present = new Uint8Array(now);
  values.set(old.values.subarray(0, now));
  present.set(old.present.subarray(0, now));
  return Buffer.from(packColumn({ values, present }));
}

/**
 * Brings a removed column back, under its id and, where nobody took it meanwhile, its name.
 *
 * @throws DomainError conflict where the name is taken, not-found where it is not among the removed
 */
export async function restoreColumn({ actor, ensembleId, columnId }: Target): Promise<string> {
  const at = await accessEnsemble(actor, "compute", ensembleId);
  return inTransaction(async (tx) => {
    const { frames } = await lockEnsemble(tx, at);
    const own = and(eq(removedColumns.id, columnId), eq(removedColumns.ensembleId, at.ensembleId));
    const [row] = await tx.select().from(removedColumns).where(own);
    if (row === undefined) throw notFound();
    const same = await tx
      .select({ id: columns.id })
      .from(columns)
      .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, row.name)));
    if (same.length > 0) {
      const message = `Another column is called "${row.name}" now. Rename it first.`;
      throw new DomainError("conflict", "The name is taken", message, {
        faults: [{ field: "name", message }],
      });
    }
    const { frames: before, createdAt, ...facts } = factsSchema.parse(row.facts);
    const data = fitted(row.data, before, frames);
    const count = unpackColumn(data, frames).present.reduce((sum, flag) => sum + flag, 0);
    await tx.insert(columns).values({
      // Written by `removeColumn` from the row itself.
      ...(facts as unknown as typeof columns.$inferInsert),
      createdAt: new Date(createdAt),
      data,
      dataSha: createHash("sha256").update(data).digest(),
      count,
    });
    await tx.delete(removedColumns).where(own);
    await recomputeComputed(tx, at.ensembleId);
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, at, at, { type: "column-restored", data: { id: row.id, name: row.name } });
    return row.name;
  });
}

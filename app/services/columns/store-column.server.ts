import { createHash } from "node:crypto";
import { and, eq, isNull, sql } from "drizzle-orm";
import type { z } from "zod";
import type { Transaction } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { type columnDefinitionSchema, columns, ensembles } from "../../db/schema.server.ts";
import { type ColumnData, packColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import type { EnergyKind } from "../../lib/views.ts";
import { notFound } from "../http.server.ts";

/** How often a column's values count in an average; energies have none. */
export const COLUMN_RULES = ["linear", "r-6", "r-3", "circular"] as const;
export type ColumnRule = (typeof COLUMN_RULES)[number];

/** One quantity over the frames of an ensemble, ready to be kept. What is left out is not known. */
export interface ColumnToStore {
  /** 1 to 120 characters, unique in the ensemble; for an energy the name of its level. */
  name: string;
  kind: "energy" | "property";
  /** Of an energy one of `ENERGY_UNITS`; null where the numbers have none. */
  unit: string | null;
  /** One value a frame of the ensemble, held frames too; absent is a bit. */
  data: ColumnData;
  /** `table:NAME`, `structures:NAME`, `expression`, `observable`: what the numbers come from. */
  origin: string;
  /** Of a property; linear where left out. */
  rule?: ColumnRule;
  energyKind?: EnergyKind;
  /** K, of a free energy or an enthalpy. */
  temperature?: number | null;
  /** False while an energy is only taken as electronic because nobody said. */
  kindStated?: boolean;
  geometryLevel?: string | null;
  solvent?: string | null;
  /** Per-atom properties: what they share ("shift"), and the atom from 1. */
  quantity?: string | null;
  atom?: number | null;
  definition?: z.infer<typeof columnDefinitionSchema> | null;
}

export interface StoredColumn {
  id: string;
  name: string;
  /** A column of that name was there, and this one took its place under its id. */
  replaced: boolean;
}

/** The ensemble's row, locked: whoever adds columns at the same time waits. */
export async function lockEnsemble(tx: Transaction, at: { teamId: string; ensembleId: string }) {
  const rows = await tx
    .select({ id: ensembles.id, frames: ensembles.frames, version: ensembles.version })
    .from(ensembles)
    .where(and(eq(ensembles.id, at.ensembleId), eq(ensembles.teamId, at.teamId), isNull(ensembles.deletedAt)))
    .for("update");
  const row = rows[0];
  if (row === undefined) throw notFound();
  return row;
}

/** Says that an ensemble changed, in the transaction of the change. */
export async function touchEnsemble(tx: Transaction, ensembleId: string): Promise<void> {
  await tx
    .update(ensembles)
    .set({ version: sql`${ensembles.version} + 1`, changedAt: new Date() })
    .where(eq(ensembles.id, ensembleId));
}

function taken(name: string, found: "energy" | "property"): DomainError {
  const what = found === "energy" ? "a level" : "a property";
  const message = `"${name}" is the name of ${what} of this ensemble already. Give it another name, or send replace=true to put the new numbers in its place.`;
  return new DomainError("conflict", "The name is taken", message, {
    faults: [{ field: "replace", message }],
  });
}

/** Why numbers of one kind cannot take the place of a column of the other; null where they can. */
export function kindClash(
  name: string,
  before: "energy" | "property",
  now: "energy" | "property",
): string | null {
  if (before === now) return null;
  const [was, is] = before === "energy" ? ["a level", "a property"] : ["a property", "a level"];
  return `"${name}" is ${was} of this ensemble, and the new numbers are ${is}: one cannot take the place of the other. Give it another name.`;
}

function checkKind(name: string, before: "energy" | "property", now: "energy" | "property"): void {
  const message = kindClash(name, before, now);
  if (message === null) return;
  throw new DomainError("conflict", "The name is taken", message, { faults: [{ field: "name", message }] });
}

/** The row of a column without what makes it this one: id, ensemble, place. */
export function rowOf(column: ColumnToStore) {
  const packed = Buffer.from(packColumn(column.data));
  const energy = column.kind === "energy";
  return {
    name: column.name,
    kind: column.kind,
    unit: column.unit,
    rule: energy ? null : (column.rule ?? "linear"),
    energyKind: energy ? (column.energyKind ?? "electronic") : null,
    temperature: energy ? (column.temperature ?? null) : null,
    kindStated: energy ? (column.kindStated ?? false) : true,
    geometryLevel: column.geometryLevel ?? null,
    solvent: column.solvent ?? null,
    quantity: column.quantity ?? null,
    atom: column.atom ?? null,
    definition: column.definition ?? null,
    origin: [...column.origin].slice(0, 200).join(""),
    count: column.data.present.reduce((sum, flag) => sum + flag, 0),
    data: packed,
    dataSha: createHash("sha256").update(packed).digest(),
    createdAt: new Date(),
  };
}

/**
 * Keeps one column, in the transaction of the act that makes it; the ensemble must be locked (`lockEnsemble`) and access
 * decided. A column that is replaced keeps its id, its place and with it hue and marker. The caller writes the entry
 * of the logbook, and calls `recomputeDerived` where numbers were replaced.
 *
 * @throws DomainError conflict (409) where the name is taken and `replace` is not asked, or is that of another kind
 * @example
 * await inTransaction(async (tx) => {
 *   await lockEnsemble(tx, at);
 *   const { id } = await storeColumn(tx, at, { name: "d(O1,N2)", kind: "property", unit: "Å", data, origin: "observable",
 *     rule: "linear", definition });
 * });
 */
export async function storeColumn(
  tx: Transaction,
  at: { ensembleId: string; userId: string | null },
  column: ColumnToStore,
  options: { replace?: boolean } = {},
): Promise<StoredColumn> {
  const same = await tx
    .select({ id: columns.id, kind: columns.kind })
    .from(columns)
    .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, column.name)));
  const before = same[0];
  if (before !== undefined) {
    checkKind(column.name, before.kind, column.kind);
    if (options.replace !== true) throw taken(column.name, before.kind);
    await tx.update(columns).set(rowOf(column)).where(eq(columns.id, before.id));
    return { id: before.id, name: column.name, replaced: true };
  }
  const last = await tx
    .select({ ordinal: sql<number | null>`max(${columns.ordinal})` })
    .from(columns)
    .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.kind, column.kind)));
  const id = newId();
  await tx.insert(columns).values({
    ...rowOf(column),
    id,
    ensembleId: at.ensembleId,
    createdBy: at.userId,
    ordinal: (last[0]?.ordinal ?? 0) + 1,
  });
  return { id, name: column.name, replaced: false };
}

import { createHash } from "node:crypto";
import { eq } from "drizzle-orm";
import type { Queryable, Transaction } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import { type ColumnData, packColumn, unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Formula, type FormulaInput, readFormula } from "./expression.ts";

type Row = typeof columns.$inferSelect;

/** Formulas over a column of this ensemble; `inputs` are what they need. */
export interface DerivedColumn {
  id: string;
  name: string;
  inputs: string[];
}

/** All columns of an ensemble that are computed from others. */
export async function derivedColumns(on: Queryable, ensembleId: string): Promise<DerivedColumn[]> {
  const rows = await on
    .select({ id: columns.id, name: columns.name, definition: columns.definition })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
  return rows.flatMap(({ id, name, definition }) =>
    definition?.type === "expression"
      ? [{ id, name, inputs: definition.inputs.map(({ column }) => column) }]
      : [],
  );
}

export function toInput(row: Omit<FormulaInput, "id"> & { id: string }): FormulaInput {
  const { id, name, kind, unit, energyKind, temperature } = row;
  return { id, name, kind, unit, energyKind, temperature };
}

/** The formula as it was written, over the columns that it meant then, whatever they are called now. */
function formulaOf(row: Row, all: readonly Row[]): Formula | null {
  const { definition } = row;
  if (definition?.type !== "expression") return null;
  const inputs = definition.inputs.flatMap(({ name, column }) => {
    const found = all.find(({ id }) => id === column);
    return found === undefined ? [] : [{ ...toInput(found), name }];
  });
  if (inputs.length < definition.inputs.length) return null;
  try {
    return readFormula(definition.text, inputs);
  } catch (error) {
    // A unit that changed under the formula: nothing of it can be computed any more.
    if (error instanceof DomainError) return null;
    throw error;
  }
}

/**
 * Computes all formulas of an ensemble again, each after what it needs, in the transaction that changed their inputs: call
 * it wherever numbers or units of a column change, or the number of frames. A formula that lost an input has no values.
 */
export async function recomputeDerived(tx: Transaction, ensembleId: string): Promise<void> {
  const rows = await tx.select().from(columns).where(eq(columns.ensembleId, ensembleId));
  const open = rows.filter(({ definition }) => definition?.type === "expression");
  if (open.length === 0) return;
  const [ensemble] = await tx
    .select({ frames: ensembles.frames })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  const frames = ensemble?.frames ?? 0;
  const data = new Map<string, ColumnData>();
  for (const row of rows) if (!open.includes(row)) data.set(row.id, unpackColumn(row.data, frames));
  for (let left = open; left.length > 0; ) {
    const ready = left.filter((row) =>
      inputsOf(row).every((id) => data.has(id) || !left.some((one) => one.id === id)),
    );
    // No circle is ever stored; were there one, its columns would have no values.
    const next = ready.length > 0 ? ready : left;
    for (const row of next) {
      const made = formulaOf(row, rows)?.compute(data, frames) ?? nothing(frames);
      data.set(row.id, made);
      await write(tx, row.id, made);
    }
    left = left.filter((row) => !next.includes(row));
  }
}

function inputsOf(row: Row): string[] {
  return row.definition?.type === "expression" ? row.definition.inputs.map(({ column }) => column) : [];
}

function nothing(frames: number): ColumnData {
  return { values: new Float64Array(frames), present: new Uint8Array(frames) };
}

async function write(tx: Transaction, id: string, made: ColumnData): Promise<void> {
  const packed = Buffer.from(packColumn(made));
  await tx
    .update(columns)
    .set({
      data: packed,
      dataSha: createHash("sha256").update(packed).digest(),
      count: made.present.reduce((sum, flag) => sum + flag, 0),
    })
    .where(eq(columns.id, id));
}

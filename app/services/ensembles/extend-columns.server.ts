import { createHash } from "node:crypto";
import { eq, sql } from "drizzle-orm";
import type { Queryable } from "../../db/client.server.ts";
import { newId } from "../../db/new-id.server.ts";
import { columns } from "../../db/schema.server.ts";
import { type ColumnData, packColumn, unpackColumn } from "../../lib/column-data.ts";
import { DomainError } from "../../lib/errors.ts";
import { asEnergyUnit } from "../../lib/intake/batch-energies.ts";
import type { IntakeMessage } from "../../lib/intake/report.ts";
import type { NewColumn } from "../../lib/intake/settle-energies.ts";
import { kcalPer } from "../../lib/units.ts";

type ColumnRow = typeof columns.$inferSelect;

/** The values of a column over more frames; those added have none. */
function longer(data: ColumnData, frames: number): ColumnData {
  const values = new Float64Array(frames);
  const present = new Uint8Array(frames);
  values.set(data.values);
  present.set(data.present);
  return { values, present };
}

/** Values of the batch in the unit of the column that they join; null where no factor leads from one to the other. */
function factorTo(unit: string | null, from: string | null): number | null {
  if (unit === from) return 1;
  const [to, own] = [asEnergyUnit(unit), asEnergyUnit(from)];
  return to === null || own === null ? null : kcalPer(own) / kcalPer(to);
}

/** A further number of the files that a person made a level: its values join, in the unit that was stated for them. */
function isUsedAsLevel(row: ColumnRow, made: NewColumn): boolean {
  return row.kind === "energy" && made.kind === "property" && row.origin === made.origin;
}

/** The column that the values of the batch's belong to: that of its name, or of its key or field under another name. */
function ownOf(
  row: ColumnRow,
  made: ReadonlyMap<string, NewColumn>,
  names: ReadonlySet<string>,
): NewColumn | undefined {
  const named = made.get(row.name.toLowerCase());
  if (named !== undefined || row.origin === null) return named;
  return [...made.values()].find(
    ({ kind, origin, name }) =>
      kind === "property" && origin === row.origin && !names.has(name.toLowerCase()),
  );
}

/** What a column of the batch becomes: part of one that is there, or one of its own. */
function join(row: ColumnRow, made: NewColumn, data: ColumnData): string | null {
  const used = isUsedAsLevel(row, made);
  const unit = used && made.unit === null ? row.unit : made.unit;
  const factor = row.kind === made.kind || used ? factorTo(row.unit, unit) : null;
  if (factor === null) return null;
  made.data.present.forEach((flag, k) => {
    if (flag !== 1) return;
    data.values[k] = (made.data.values[k] ?? 0) * factor;
    data.present[k] = 1;
  });
  return factor === 1 ? "" : `converted from ${made.unit} to ${row.unit}, the unit of “${row.name}”`;
}

function checkJoins(row: ColumnRow, made: NewColumn): void {
  if (made.kind !== "energy") return;
  const refuse = (field: string, message: string) =>
    new DomainError("conflict", "The level is another one", message, { faults: [{ field, message }] });
  if (row.kind !== "energy") {
    throw refuse("level", `“${row.name}” is a property of this ensemble. Give the level another name.`);
  }
  if (row.energyKind !== made.energyKind || row.temperature !== made.temperature) {
    const kind = row.temperature === null ? row.energyKind : `${row.energyKind} at ${row.temperature} K`;
    throw refuse(
      "energyKind",
      `“${row.name}” holds energies that are ${kind}, and those of the batch are not. Name another level.`,
    );
  }
}

async function write(tx: Queryable, row: ColumnRow, data: ColumnData): Promise<void> {
  const packed = Buffer.from(packColumn(data));
  await tx
    .update(columns)
    .set({
      data: packed,
      dataSha: createHash("sha256").update(packed).digest(),
      count: data.present.reduce((sum, flag) => sum + flag, 0),
    })
    .where(eq(columns.id, row.id));
}

/**
 * Makes every column of an ensemble as long as its frames are now, with the values that a batch brings: into the column
 * of the same name, or as a column of its own where there is none.
 *
 * @param made columns of the batch over all frames, those before it absent
 * @param file the batch's first file, for what is to be said
 * @returns remarks on what was converted, or could not be joined
 * @throws DomainError conflict where a level of that name is something else
 */
export async function extendColumns(
  tx: Queryable,
  ensembleId: string,
  frames: { before: number; now: number },
  made: readonly NewColumn[],
  file: string,
): Promise<IntakeMessage[]> {
  const messages: IntakeMessage[] = [];
  const remark = (message: string) => messages.push({ code: "E06", severity: "remark", file, message });
  const byName = new Map(made.map((column) => [column.name.toLowerCase(), column]));
  const rows = await tx
    .select({ id: columns.id, name: columns.name })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
  const names = new Set(rows.map(({ name }) => name.toLowerCase()));
  for (const { id } of rows) {
    const [row] = await tx.select().from(columns).where(eq(columns.id, id));
    if (row === undefined) continue;
    const data = longer(unpackColumn(row.data, frames.before), frames.now);
    const own = ownOf(row, byName, names);
    if (own) {
      byName.delete(own.name.toLowerCase());
      checkJoins(row, own);
      const said = join(row, own, data);
      if (said === null) {
        remark(
          `“${own.name}” of this batch is in ${own.unit ?? "no unit"}, in the ensemble ${row.unit ?? "none"}: its values were left out.`,
        );
      } else if (said !== "") remark(`Values of this batch were ${said}.`);
    }
    await write(tx, row, data);
  }
  for (const column of byName.values()) await insertColumn(tx, ensembleId, column);
  return messages;
}

async function insertColumn(
  tx: Queryable,
  ensembleId: string,
  { data, ...column }: NewColumn,
): Promise<void> {
  const last = await tx
    .select({ ordinal: sql<number | null>`max(${columns.ordinal})` })
    .from(columns)
    .where(sql`${columns.ensembleId} = ${ensembleId} and ${columns.kind} = ${column.kind}`);
  const packed = Buffer.from(packColumn(data));
  await tx.insert(columns).values({
    ...column,
    id: newId(),
    ensembleId,
    ordinal: (last[0]?.ordinal ?? 0) + 1,
    data: packed,
    dataSha: createHash("sha256").update(packed).digest(),
    createdAt: new Date(),
  });
}

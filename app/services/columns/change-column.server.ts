import { and, eq } from "drizzle-orm";
import { z } from "zod";
import { inTransaction } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { ENERGY_KINDS } from "../../lib/api/schemas.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { lockEnsemble, touchEnsemble } from "./store-column.server.ts";

const optionalText = z
  .string()
  .trim()
  .max(120)
  .transform((text) => (text === "" ? null : text));

/** What may be said of a column that is there; its numbers and unit are those of its source. */
export const columnChangeSchema = z.strictObject({
  name: z.string().trim().min(1, "A column has a name of 1 to 120 characters.").max(120).optional(),
  energyKind: z.enum(ENERGY_KINDS).optional(),
  temperature: z.number("A temperature in K, such as 298.15.").min(0.001).max(100_000).nullable().optional(),
  geometryLevel: optionalText.optional(),
  solvent: optionalText.optional(),
});
export type ColumnChange = z.infer<typeof columnChangeSchema>;

type Row = typeof columns.$inferSelect;

const show = (value: string | number | null) => (value === null ? null : String(value));

/** The values that change, in the order of the form. */
function changesOf(row: Row, change: ColumnChange) {
  const energy = row.kind === "energy";
  const wanted: [string, string | number | null, string | number | null | undefined][] = [
    ["name", row.name, change.name],
    ["kind", row.energyKind, energy ? change.energyKind : undefined],
    ["temperature", row.temperature, energy ? change.temperature : undefined],
    ["level of the geometry", row.geometryLevel, energy ? change.geometryLevel : undefined],
    ["solvent", row.solvent, change.solvent],
  ];
  return wanted.flatMap(([what, before, after]) =>
    after === undefined || after === before ? [] : [{ what, before: show(before), after: show(after) }],
  );
}

/**
 * Renames a column, or states what its energies are; in the logbook, before and after. Formulas go on meaning the column.
 *
 * @throws DomainError conflict for a name that is taken, not-found for a column of another ensemble
 */
export async function changeColumn(options: {
  actor: Actor;
  ensembleId: string;
  columnId: string;
  change: ColumnChange;
}): Promise<void> {
  const { change, columnId } = options;
  const at = await accessEnsemble(options.actor, "compute", options.ensembleId);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, at);
    const own = and(eq(columns.id, columnId), eq(columns.ensembleId, at.ensembleId));
    const [row] = await tx.select().from(columns).where(own);
    if (row === undefined) throw notFound();
    if (change.name !== undefined && change.name !== row.name) {
      const same = await tx
        .select({ id: columns.id })
        .from(columns)
        .where(and(eq(columns.ensembleId, at.ensembleId), eq(columns.name, change.name)));
      if (same.length > 0) {
        const message = `"${change.name}" is the name of another column of this ensemble.`;
        throw new DomainError("conflict", "The name is taken", message, {
          faults: [{ field: "name", message }],
        });
      }
    }
    const changes = changesOf(row, change);
    const stated = row.kind === "energy" && change.energyKind !== undefined && !row.kindStated;
    if (changes.length === 0 && !stated) return;
    const energy = row.kind === "energy";
    await tx
      .update(columns)
      .set({
        ...(change.name === undefined ? {} : { name: change.name }),
        ...(change.solvent === undefined ? {} : { solvent: change.solvent }),
        ...(energy && change.energyKind !== undefined
          ? { energyKind: change.energyKind, kindStated: true }
          : {}),
        ...(energy && change.temperature !== undefined ? { temperature: change.temperature } : {}),
        ...(energy && change.geometryLevel !== undefined ? { geometryLevel: change.geometryLevel } : {}),
      })
      .where(own);
    await touchEnsemble(tx, at.ensembleId);
    const said =
      stated && !changes.some(({ what }) => what === "kind")
        ? [{ what: "kind", before: "not stated", after: change.energyKind ?? null }, ...changes]
        : changes;
    await writeEntry(tx, at, at, {
      type: "column-changed",
      data: { id: columnId, name: change.name ?? row.name, changes: said },
    });
  });
}

import { and, desc, eq } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { removedColumns } from "../../db/schema.server.ts";
import { type ColumnsView, originWords } from "../../lib/columns-view.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns } from "../ensembles/find-columns.server.ts";
import { derivedColumns } from "./recompute-derived.server.ts";

/** All columns of an ensemble with where they come from, and those removed lately. */
export async function loadColumns(options: { actor: Actor; ensembleId: string }): Promise<ColumnsView> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
  const [found, derived, removed] = await Promise.all([
    frameStrip(ensembleId).then((strip) => findColumns(ensembleId, strip)),
    derivedColumns(db, ensembleId),
    db
      .select({ id: removedColumns.id, name: removedColumns.name, removedAt: removedColumns.removedAt })
      .from(removedColumns)
      .where(and(eq(removedColumns.ensembleId, ensembleId)))
      .orderBy(desc(removedColumns.removedAt))
      .limit(50),
  ]);
  return {
    columns: found.map(({ dataSha: _, origin, definition, ...column }) => ({
      ...column,
      origin: originWords(origin, definition),
      computed: definition !== null,
      formula: definition?.type === "expression" ? definition.text : null,
      usedBy: derived.filter(({ inputs }) => inputs.includes(column.id)).map(({ name }) => name),
    })),
    removed: removed.map(({ removedAt, ...row }) => ({ ...row, removedAt: removedAt.toISOString() })),
  };
}

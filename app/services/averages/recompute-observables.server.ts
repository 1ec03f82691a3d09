import { createHash } from "node:crypto";
import { and, eq } from "drizzle-orm";
import type { Transaction } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import { fromDefinition } from "../../lib/averages/observable.ts";
import { ruleOf } from "../../lib/averages/rule.ts";
import { packColumn } from "../../lib/column-data.ts";
import { observableColumn, parityGroupOf } from "./observable-values.server.ts";

/**
 * Computes the columns of picked atoms again, from the frames as they are now: after a further batch, or after a rule of
 * averaging over equivalent pairs was changed. In the transaction of the act that moved them.
 *
 * @param only the column of this id; all of them where left out
 */
export async function recomputeObservables(
  tx: Transaction,
  ensembleId: string,
  only?: string,
): Promise<void> {
  const rows = await tx
    .select({ id: columns.id, definition: columns.definition, rule: columns.rule, unit: columns.unit })
    .from(columns)
    .where(
      only === undefined
        ? eq(columns.ensembleId, ensembleId)
        : and(eq(columns.ensembleId, ensembleId), eq(columns.id, only)),
    );
  const picked = rows.flatMap(({ definition, ...row }) =>
    definition?.type === "observable" ? [{ ...row, definition }] : [],
  );
  if (picked.length === 0) return;
  const found = await tx.select().from(ensembles).where(eq(ensembles.id, ensembleId));
  const ensemble = found[0];
  if (ensemble === undefined) return;
  const group = await parityGroupOf(ensemble, tx);
  for (const row of picked) {
    const observable = fromDefinition(row.definition, ruleOf(row));
    const data = await observableColumn(ensemble, observable, group, tx);
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
}

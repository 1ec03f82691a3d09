import { and, eq } from "drizzle-orm";
import { inTransaction } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { AVERAGE_RULES, type AverageRule, ruleAgainstUnit, ruleOf } from "../../lib/averages/rule.ts";
import { DomainError } from "../../lib/errors.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { recomputeDerived } from "../columns/recompute-derived.server.ts";
import { lockEnsemble, touchEnsemble } from "../columns/store-column.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { recomputeObservables } from "./recompute-observables.server.ts";

/**
 * Chooses how a property column is averaged; in the logbook. Of a distance of picked atoms the rule also says how
 * equivalent pairs are averaged, so that its values are computed again.
 *
 * @throws DomainError invalid (422) for an unknown rule
 */
export async function setRule(options: {
  actor: Actor;
  ensembleId: string;
  columnId: string;
  rule: string;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const rule = AVERAGE_RULES.find((one) => one === options.rule);
  if (rule === undefined) {
    const message = `A rule is one of ${AVERAGE_RULES.join(", ")}.`;
    throw new DomainError("invalid", "Unknown rule", message, { faults: [{ field: "rule", message }] });
  }
  const at = { teamId: grant.teamId, ensembleId: grant.ensembleId };
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, at);
    const rows = await tx
      .select({ name: columns.name, rule: columns.rule, unit: columns.unit, definition: columns.definition })
      .from(columns)
      .where(
        and(
          eq(columns.ensembleId, at.ensembleId),
          eq(columns.id, options.columnId),
          eq(columns.kind, "property"),
        ),
      );
    const column = rows[0];
    if (column === undefined) throw notFound();
    const against = ruleAgainstUnit(rule, column.unit);
    if (against !== null) {
      const message = `The rule ${rule} averages ${against}; "${column.name}" is in ${column.unit}.`;
      throw new DomainError("invalid", "The rule does not fit", message, {
        faults: [{ field: "rule", message }],
      });
    }
    const before: AverageRule = ruleOf(column);
    if (before === rule) return;
    await tx.update(columns).set({ rule }).where(eq(columns.id, options.columnId));
    if (column.definition?.type === "observable") {
      await recomputeObservables(tx, at.ensembleId, options.columnId);
      // Formulas may stand on its values.
      await recomputeDerived(tx, at.ensembleId);
    }
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, grant, grant, {
      type: "column-changed",
      data: {
        id: options.columnId,
        name: column.name,
        changes: [{ what: "rule", before, after: rule }],
      },
    });
  });
}

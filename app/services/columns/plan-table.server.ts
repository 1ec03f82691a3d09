import { and, eq, isNotNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, frames } from "../../db/schema.server.ts";
import type { ColumnFields } from "../../lib/api/schemas.ts";
import { DELIMITER_NAMES } from "../../lib/csv/dialect.ts";
import type { MatchedRows } from "../../lib/csv/match-rows.ts";
import { planTable } from "../../lib/csv/plan-table.ts";
import { type RawTable, TableReader } from "../../lib/csv.server.ts";
import { DomainError } from "../../lib/errors.ts";
import { formatCount, plural } from "../../lib/format.ts";
import { delimiterOf, tableAnswers } from "./column-answers.ts";
import type { FilePlan, PlannedToStore } from "./plan.ts";
import type { TargetEnsemble } from "./target.server.ts";

/** Frames by their label; a label may stand on several. */
async function labelsOf(ensembleId: string): Promise<Map<string, number[]>> {
  const rows = await db
    .select({ number: frames.number, label: frames.label })
    .from(frames)
    .where(and(eq(frames.ensembleId, ensembleId), isNotNull(frames.label)));
  const labels = new Map<string, number[]>();
  for (const { number, label } of rows) {
    const name = (label ?? "").trim();
    if (name !== "") labels.set(name, [...(labels.get(name) ?? []), number]);
  }
  return labels;
}

/** What the columns of an ensemble are, by name. */
export async function kindsOf(ensembleId: string): Promise<Map<string, "energy" | "property">> {
  const rows = await db
    .select({ name: columns.name, kind: columns.kind })
    .from(columns)
    .where(eq(columns.ensembleId, ensembleId));
  return new Map(rows.map(({ name, kind }) => [name, kind]));
}

/** The numbers that a table may fill at most: 64 MB of them. */
const MOST_NUMBERS = 8_000_000;

function matchWords({ key, matched, frames: rows, missing, unknownCount }: MatchedRows): string {
  const by = key === "frame" ? "frame number" : "label";
  const parts = [`${formatCount(matched)} of ${plural(rows.length, "row")} matched by ${by}`];
  if (missing.length > 0) parts.push(`${plural(missing.length, "accepted frame")} without a row`);
  if (unknownCount > 0) parts.push(`${plural(unknownCount, "row")} of no frame`);
  return parts.join(", ");
}

/** Reads a table and says what it would become in an ensemble. */
export async function planTableFile(
  name: string,
  bytes: AsyncIterable<Uint8Array>,
  target: TargetEnsemble,
  fields: ColumnFields,
): Promise<FilePlan> {
  const answers = tableAnswers(fields);
  const reader = new TableReader({
    file: name,
    delimiter: delimiterOf(fields),
    style: answers.style,
    header: answers.header,
  });
  for await (const chunk of bytes) reader.push(chunk);
  const table = reader.end();
  refuseMany(table, target.strip.length);
  const facts = {
    strip: target.strip,
    labels: await labelsOf(target.ensembleId),
    elements: target.graph.elements,
    kinds: fields.replace ? await kindsOf(target.ensembleId) : undefined,
  };
  const plan = planTable(table, facts, answers);
  const origin = `table:${name}`;
  return {
    type: "table",
    delimiter: DELIMITER_NAMES[table.delimiter],
    header: table.header,
    rows: table.preview,
    columns: plan.columns.map(
      (column): PlannedToStore => ({
        column: column.column,
        header: column.header,
        why: column.why,
        looksLikeEnergy: column.looksLikeEnergy,
        name: column.name,
        kind: column.kind,
        unit: column.unit,
        data: column.data,
        origin,
        ...(column.rule === null ? {} : { rule: column.rule }),
        energyKind: fields.energyKind ?? "electronic",
        temperature: fields.energyTemperature ?? null,
        kindStated: fields.energyKind !== undefined,
        geometryLevel: column.kind === "energy" ? (fields.geometryLevel ?? null) : null,
        solvent: fields.solvent ?? null,
        quantity: column.quantity,
        atom: column.atom,
      }),
    ),
    leftOut: plan.leftOut,
    match: {
      by: plan.match.key,
      text: matchWords(plan.match),
      rows: plan.match.frames.length,
      matched: plan.match.matched,
      missing: plan.match.missing.length,
      unknown: plan.match.unknownCount,
      shared: 0,
    },
    questions: plan.questions,
    messages: plan.messages,
  };
}

function refuseMany(table: RawTable, frameCount: number): void {
  const numbers = table.columns.length * frameCount;
  if (numbers <= MOST_NUMBERS) return;
  const message = `${plural(table.columns.length, "column")} over ${plural(frameCount, "frame")} are ${formatCount(numbers)} values; ${formatCount(MOST_NUMBERS)} is the limit of one table. Send it in parts of fewer columns.`;
  throw new DomainError("too-large", "The table is too large", message, {
    faults: [{ field: "file", message }],
  });
}

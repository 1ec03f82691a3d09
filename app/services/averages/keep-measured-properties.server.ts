import { and, eq, isNull } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { type MeasuredProperties, measuredPropertiesSchema } from "../../lib/averages/averaging.ts";
import { MOST_MEASURED } from "../../lib/averages/measured.ts";
import { MEASURED_MOST, measuredPropertiesRecord } from "../../lib/averages/measured-properties.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { lockEnsemble, touchEnsemble } from "../columns/store-column.server.ts";
import { findAveraging, storeAveraging } from "./averaging.server.ts";
import { assertUnchanged, changesOf, jsonSent, refused, tellMeasured } from "./measured-kept.server.ts";

/** What a form sent, checked: finite numbers, each property once. */
function readValues(json: string): Map<string, number> {
  const read = measuredPropertiesSchema.safeParse(jsonSent(json));
  if (!read.success) throw refused("What was sent are no measured values. Load the page again.");
  const { values } = read.data;
  if (values.some(([, value]) => !Number.isFinite(value) || Math.abs(value) > MEASURED_MOST)) {
    throw refused("A measured value is a number between −999,999 and 999,999.");
  }
  if (values.length > MOST_MEASURED) throw refused(`At most ${MOST_MEASURED} values can be kept.`);
  const known = new Map(values);
  if (known.size !== values.length) throw refused("Each property can have one measured value.");
  return known;
}

/** Every value belongs to a property of the ensemble, or was kept before and waits for its column. */
async function assertProperties(
  tx: Transaction,
  ensembleId: string,
  names: readonly string[],
  before: ReadonlyMap<string, number>,
): Promise<void> {
  const rows = await tx
    .select({ name: columns.name })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.kind, "property"), isNull(columns.quantity)));
  const there = new Set(rows.map(({ name }) => name));
  const strange = names.find((name) => !there.has(name) && !before.has(name));
  if (strange !== undefined) throw refused(`This ensemble has no property ${strange}.`);
}

/**
 * Keeps measured values of properties of the whole molecule with the ensemble, in the place of those that were there; in
 * the logbook, value by value. An empty record takes them away.
 *
 * @param options.record `MeasuredProperties` as JSON
 * @param options.version of what the page was opened with: 0 where nothing was kept then
 * @throws DomainError invalid in words for what are no such values; conflict where somebody changed them meanwhile
 */
export async function keepMeasuredProperties(options: {
  actor: Actor;
  ensembleId: string;
  record: string;
  version: number;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const after = readValues(options.record);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, grant);
    const { data, version } = await findAveraging(grant.ensembleId, tx);
    const before = new Map(data.properties?.values ?? []);
    const changes = changesOf(written(before), written(after));
    if (changes.length === 0) return;
    await assertProperties(tx, grant.ensembleId, [...after.keys()], before);
    assertUnchanged(version, options.version);
    const kept: MeasuredProperties = measuredPropertiesRecord(after);
    const properties = after.size === 0 ? null : { ...kept, by: grant.userId, at: new Date().toISOString() };
    await storeAveraging(tx, grant.ensembleId, { ...data, properties }, version);
    await touchEnsemble(tx, grant.ensembleId);
    await tellMeasured(tx, grant, { quantity: "properties", unit: null, count: after.size, changes });
  });
}

const written = (values: ReadonlyMap<string, number>) =>
  new Map([...values].map(([name, value]) => [name, String(value)]));

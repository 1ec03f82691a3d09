import { and, eq } from "drizzle-orm";
import { inTransaction, type Transaction } from "../../db/client.server.ts";
import { columns, ensembles } from "../../db/schema.server.ts";
import { type MeasuredRecord, measuredRecordSchema } from "../../lib/averages/averaging.ts";
import { MOST_MEASURED, saysNothing } from "../../lib/averages/measured.ts";
import { atomName } from "../../lib/chem/elements.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
import { lockEnsemble, touchEnsemble } from "../columns/store-column.server.ts";
import { notFound } from "../http.server.ts";
import { findAveraging, storeAveraging } from "./averaging.server.ts";
import {
  assertUnchanged,
  changesOf,
  jsonSent,
  refused,
  type SaidChange,
  tellMeasured,
} from "./measured-kept.server.ts";

/** What a form sent, checked: finite numbers, each atom once, no slope of 0. */
function readRecord(json: string): MeasuredRecord {
  const read = measuredRecordSchema.safeParse(jsonSent(json));
  if (!read.success) throw refused("What was sent are no measured values. Load the page again.");
  const record = read.data;
  const numbers = [
    ...record.values.map(([, value]) => value),
    ...(record.aside ?? []).map(({ value }) => value),
    ...record.scaling.flatMap(({ slope, intercept }) => [slope, intercept]),
  ];
  if (numbers.some((value) => !Number.isFinite(value) || Math.abs(value) >= 1e6)) {
    throw refused("A measured value is a number between −999,999 and 999,999.");
  }
  if (record.scaling.some(({ slope }) => slope === 0))
    throw refused("A slope of 0 makes every shielding one shift.");
  if (
    record.values.length + record.scaling.length + record.swapped.length + (record.aside ?? []).length >
    MOST_MEASURED
  ) {
    throw refused(`At most ${MOST_MEASURED} values can be kept for one quantity.`);
  }
  const once = (keys: readonly number[]) => new Set(keys).size === keys.length;
  const twice = [record.values.map(([at]) => at), record.scaling.map(({ z }) => z), record.swapped];
  if (!twice.every(once)) throw refused("Each atom can have one measured value.");
  return record;
}

/** The columns of the quantity: there must be some, and every atom must be one of the molecule. */
async function atomsOf(tx: Transaction, ensembleId: string, record: MeasuredRecord) {
  const [row] = await tx
    .select({ elements: ensembles.elements, atoms: ensembles.atoms })
    .from(ensembles)
    .where(eq(ensembles.id, ensembleId));
  if (row === undefined) throw notFound();
  const [column] = await tx
    .select({ unit: columns.unit })
    .from(columns)
    .where(
      and(
        eq(columns.ensembleId, ensembleId),
        eq(columns.kind, "property"),
        eq(columns.quantity, record.quantity),
      ),
    )
    .limit(1);
  if (column === undefined) throw refused(`This ensemble has no per-atom values of ${record.quantity}.`);
  const stated = [
    ...record.values.map(([at]) => at),
    ...record.swapped,
    ...(record.of ?? []).flatMap(([, atoms]) => atoms),
    ...(record.aside ?? []).flatMap(({ atoms }) => atoms),
  ];
  const far = stated.find((at) => at > row.atoms);
  if (far !== undefined) throw refused(`There is no atom ${far}: the molecule has ${row.atoms}.`);
  const elements = row.elements.subarray(0, row.atoms);
  return { unit: column.unit, nameOf: (atom: number) => atomName(elements, atom - 1) };
}

/** What differs, value by value, as the logbook tells it. */
function changesBetween(
  before: MeasuredRecord | undefined,
  after: MeasuredRecord,
  nameOf: (atom: number) => string,
): SaidChange[] {
  // A record of before the atoms were kept with each value is named as the one that follows it.
  const later = new Map(after.of ?? []);
  const named = (atoms: readonly number[]) => atoms.map(nameOf).join(", ");
  const signal = (record: MeasuredRecord | undefined, at: number) =>
    named(new Map(record?.of ?? []).get(at) ?? later.get(at) ?? [at]);
  const said = (record: MeasuredRecord | undefined) =>
    new Map<string, string>([
      ...(record?.values ?? []).map(([at, value]) => [signal(record, at), String(value)] as const),
      ...(record?.aside ?? []).map(({ atoms, value }) => [named(atoms), String(value)] as const),
      ...(record?.scaling ?? []).map(
        ({ z, slope, intercept }) =>
          [`line of element ${z}`, `slope ${slope}, intercept ${intercept}`] as const,
      ),
      ...(record?.swapped ?? []).map(
        (at) => [`assignment of ${nameOf(at)} and its pair`, "swapped"] as const,
      ),
      ...(record?.are ? [["computed numbers are", record.are] as const] : []),
    ]);
  return changesOf(said(before), said(after));
}

/**
 * Keeps measured values of a per-atom quantity with the ensemble, in the place of those that were there; in the logbook,
 * value by value. An empty record takes them away.
 *
 * @param options.record `MeasuredRecord` as JSON
 * @param options.version of what the page was opened with: 0 where nothing was kept then
 * @throws DomainError invalid in words for what are no such values; conflict where somebody changed them meanwhile
 */
export async function keepMeasured(options: {
  actor: Actor;
  ensembleId: string;
  record: string;
  version: number;
}): Promise<void> {
  const grant = await accessEnsemble(options.actor, "compute", options.ensembleId);
  const record = readRecord(options.record);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, grant);
    const { unit, nameOf } = await atomsOf(tx, grant.ensembleId, record);
    const { data, version } = await findAveraging(grant.ensembleId, tx);
    const before = data.measured.find(({ quantity }) => quantity === record.quantity);
    const changes = changesBetween(before, record, nameOf);
    if (changes.length === 0 || (before === undefined && saysNothing(record))) return;
    assertUnchanged(version, options.version);
    const others = data.measured.filter((one) => one !== before);
    const kept = { ...record, by: grant.userId, at: new Date().toISOString() };
    const measured = saysNothing(record) ? others : [...others, kept];
    await storeAveraging(tx, grant.ensembleId, { ...data, measured }, version);
    await touchEnsemble(tx, grant.ensembleId);
    const { quantity, values } = record;
    await tellMeasured(tx, grant, { quantity, unit, count: values.length, changes });
  });
}

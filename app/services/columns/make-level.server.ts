import { and, eq, sql } from "drizzle-orm";
import { z } from "zod";
import { db, inTransaction, type Transaction } from "../../db/client.server.ts";
import { columns } from "../../db/schema.server.ts";
import { ENERGY_KINDS } from "../../lib/api/schemas.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { whyNoLevel } from "../../lib/columns-view.ts";
import { DomainError } from "../../lib/errors.ts";
import { ENERGY_UNITS } from "../../lib/units.ts";
import { type Actor, accessEnsemble, type Grant } from "../auth/access.server.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { siftAfterLevels } from "../ensembles/sift-after-intake.server.ts";
import { notFound } from "../http.server.ts";
import { writeEntry } from "../logbook/write-entry.server.ts";
import { derivedColumns } from "./recompute-derived.server.ts";
import { lockEnsemble, touchEnsemble } from "./store-column.server.ts";

const optionalText = z
  .string()
  .trim()
  .max(120)
  .transform((text) => (text === "" ? null : text))
  .nullable()
  .default(null);

/** What a person states of a column of numbers that are energies: nothing of it can be read off the numbers. */
export const levelStatedSchema = z.strictObject({
  name: z.string().trim().min(1, "A level has a name of 1 to 120 characters.").max(120),
  unit: z.enum(
    ENERGY_UNITS,
    "Choose the unit of the energies: hartree, kcal/mol, kJ/mol, eV, meV, cm-1 or K.",
  ),
  energyKind: z.enum(ENERGY_KINDS).default("electronic"),
  temperature: z
    .number("A temperature in K, such as 298.15.")
    .min(0.001)
    .max(100_000)
    .nullable()
    .default(null),
  geometryLevel: optionalText,
  solvent: optionalText,
});
export type LevelStated = z.input<typeof levelStatedSchema>;

interface Target {
  actor: Actor;
  ensembleId: string;
  columnId: string;
}
type Row = typeof columns.$inferSelect;
type At = Grant & { ensembleId: string };

function refuse(field: string, title: string, message: string, code: "conflict" | "invalid" = "conflict") {
  return new DomainError(code, title, message, { faults: [{ field, message }] });
}

async function refuseWhereNeeded(tx: Transaction, row: Row): Promise<void> {
  const all = await derivedColumns(tx, row.ensembleId);
  const needed = all.filter(({ inputs }) => inputs.includes(row.id)).map(({ name }) => `"${name}"`);
  if (needed.length === 0) return;
  const message = `${needed.join(", ")} ${needed.length === 1 ? "is" : "are"} computed from "${row.name}" as it is. Remove ${needed.length === 1 ? "it" : "them"} first.`;
  throw refuse("column", "A formula needs it", message);
}

async function refuseTakenName(tx: Transaction, row: Row, name: string): Promise<void> {
  if (name === row.name) return;
  const same = await tx
    .select({ id: columns.id })
    .from(columns)
    .where(and(eq(columns.ensembleId, row.ensembleId), eq(columns.name, name)));
  if (same.length === 0) return;
  throw refuse("name", "The name is taken", `"${name}" is the name of another column of this ensemble.`);
}

async function nextOrdinal(tx: Transaction, ensembleId: string, kind: Row["kind"]): Promise<number> {
  const [last] = await tx
    .select({ ordinal: sql<number | null>`max(${columns.ordinal})` })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.kind, kind)));
  return (last?.ordinal ?? 0) + 1;
}

/** What differs, in the words of the logbook. */
function differences(before: Row, after: Partial<Row>) {
  const show = (value: unknown) => (value === null || value === undefined ? null : String(value));
  const said = (kind: Row["kind"]) => (kind === "energy" ? "level" : "property");
  const named: [string, keyof Row][] = [
    ["name", "name"],
    ["unit", "unit"],
    ["kind", "energyKind"],
    ["temperature", "temperature"],
    ["level of the geometry", "geometryLevel"],
    ["solvent", "solvent"],
    ["rule", "rule"],
  ];
  const rest = named.flatMap(([what, key]) => {
    if (!(key in after) || before[key] === after[key]) return [];
    return [{ what, before: show(before[key]), after: show(after[key]) }];
  });
  return [{ what: "used as", before: said(before.kind), after: said(after.kind ?? before.kind) }, ...rest];
}

/** Changes what a column is, in one transaction with its entry of the logbook. */
async function turn(
  target: Target,
  decide: (tx: Transaction, row: Row, at: At) => Promise<Partial<Row>>,
): Promise<At> {
  const at = await accessEnsemble(target.actor, "compute", target.ensembleId);
  await inTransaction(async (tx) => {
    await lockEnsemble(tx, at);
    const own = and(eq(columns.id, target.columnId), eq(columns.ensembleId, at.ensembleId));
    const [row] = await tx.select().from(columns).where(own);
    if (row === undefined) throw notFound();
    const after = await decide(tx, row, at);
    await tx.update(columns).set(after).where(own);
    await touchEnsemble(tx, at.ensembleId);
    await writeEntry(tx, at, at, {
      type: "column-changed",
      data: { id: row.id, name: after.name ?? row.name, changes: differences(row, after) },
    });
  });
  return at;
}

/**
 * Makes a level of a property whose numbers are energies, such as a second data field of an SDF: the numbers stay as they
 * are, the person states unit and kind. The column keeps its id; it stands last among the levels.
 *
 * @throws DomainError invalid for a column whose numbers are no energies, conflict for a name that is taken or where a
 *   formula stands on the column, not-found for a column of another ensemble
 * @example await makeLevel({ actor, ensembleId, columnId, stated: { name: "UFF", unit: "kcal/mol" } });
 */
export async function makeLevel(options: Target & { stated: LevelStated }): Promise<void> {
  const { name, ...stated } = levelStatedSchema.parse(options.stated);
  const at = await turn(options, async (tx, row, { userId }) => {
    const why = whyNoLevel({ ...row, computed: row.definition !== null });
    if (why !== null) throw refuse("column", "No level", `"${row.name}" ${why}`, "invalid");
    await refuseTakenName(tx, row, name);
    await refuseWhereNeeded(tx, row);
    const ordinal = await nextOrdinal(tx, row.ensembleId, "energy");
    // Who made it a level stands in `createdBy`: by it a new reading of the files knows that it is one.
    return { ...stated, name, kind: "energy", kindStated: true, rule: null, ordinal, createdBy: userId };
  });
  await siftAfterLevels(at, [options.columnId]);
}

/**
 * Makes a property of a level again; its numbers and unit stay. Sifts at it stay as they were computed, as with a level
 * that is removed.
 *
 * @throws DomainError invalid for a column that is no level or is computed, conflict where a formula stands on it
 */
export async function makeProperty(options: Target): Promise<void> {
  await turn(options, async (tx, row) => {
    if (row.kind !== "energy") throw refuse("column", "No level", `"${row.name}" is no level.`, "invalid");
    if (row.definition !== null) {
      const message = `"${row.name}" is computed; what it is follows from its formula.`;
      throw refuse("column", "A computed level", message, "invalid");
    }
    await refuseWhereNeeded(tx, row);
    const ordinal = await nextOrdinal(tx, row.ensembleId, "property");
    return {
      kind: "property",
      energyKind: null,
      temperature: null,
      geometryLevel: null,
      kindStated: true,
      rule: "linear",
      ordinal,
    };
  });
}

/** Lowest and highest number of a column over the accepted frames, as written; for the spread that each unit would mean. */
export async function columnSpan(
  target: Target,
): Promise<{ lowest: number | null; highest: number | null; count: number }> {
  const { ensembleId } = await accessEnsemble(target.actor, "read", target.ensembleId);
  const strip = await frameStrip(ensembleId);
  const [row] = await db
    .select({ data: columns.data })
    .from(columns)
    .where(and(eq(columns.id, target.columnId), eq(columns.ensembleId, ensembleId)));
  if (row === undefined) throw notFound();
  const { values, present } = unpackColumn(row.data, strip.length);
  let [lowest, highest, count] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, 0];
  for (const [k, value] of values.entries()) {
    if (present[k] !== 1 || strip[k] === "h") continue;
    lowest = Math.min(lowest, value);
    highest = Math.max(highest, value);
    count += 1;
  }
  return count === 0 ? { lowest: null, highest: null, count } : { lowest, highest, count };
}

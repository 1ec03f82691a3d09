import type { columns } from "../../db/schema.server.ts";

type Row = typeof columns.$inferSelect;
export type ReadColumn = Pick<
  Row,
  | "id"
  | "name"
  | "kind"
  | "unit"
  | "origin"
  | "rule"
  | "ordinal"
  | "energyKind"
  | "temperature"
  | "kindStated"
  | "geometryLevel"
  | "solvent"
  | "createdBy"
>;

/** The column of the old reading that a new one goes on from: that of its name, or of its key or field under another name. */
function before(old: readonly ReadColumn[], made: ReadColumn): ReadColumn | undefined {
  const named = old.find(({ name }) => name === made.name);
  if (named !== undefined || made.kind !== "property" || made.origin === null) return named;
  // A level of the files is renamed by reading them again; what a person made of a key or field stays theirs.
  return old.find(
    ({ kind, origin, createdBy }) => origin === made.origin && (kind === "property" || createdBy !== null),
  );
}

/**
 * What stays of a column when its files are read again: its id and place, and what a person stated of it: that it is a
 * level, and of which unit and kind; its name; how it is averaged.
 *
 * @param old columns that came with the files until now; those that a person made a level carry `createdBy`
 */
export function keepStated(old: readonly ReadColumn[], made: ReadColumn): Partial<ReadColumn> {
  const own = before(old, made);
  if (own === undefined) return {};
  if (made.kind === "energy") {
    return own.kind === "energy" ? { id: own.id, ordinal: own.ordinal } : { id: own.id };
  }
  const { id, ordinal, name, rule, solvent } = own;
  if (own.kind === "property") return { id, ordinal, name, solvent, ...(rule === null ? {} : { rule }) };
  // The level of the last reading, which this one takes for a property.
  if (own.createdBy === null) return { id };
  const { unit, energyKind, temperature, kindStated, geometryLevel, createdBy } = own;
  return {
    ...{ id, ordinal, name, solvent, unit, energyKind, temperature, kindStated, geometryLevel, createdBy },
    kind: "energy",
    rule: null,
  };
}

import { and, asc, eq, inArray } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, frames } from "../../db/schema.server.ts";
import { type AtomColumn, mergeEquivalentAtoms, splitClasses } from "../../lib/averages/atom-groups.ts";
import { ParityGroup } from "../../lib/averages/parity-group.ts";
import type { PropertyValues } from "../../lib/averages/property-set.ts";
import { ruleOf } from "../../lib/averages/rule.ts";
import { packedFrames, unpackColumn } from "../../lib/column-data.ts";
import type { KeptConformer } from "../../lib/recipe/result.ts";
import { loadPositions } from "../ensembles/load-positions.server.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { findSplits } from "./averaging.server.ts";

/** Columns whose numbers are read at once: of 50,000 frames each takes 400 kB. */
const COLUMNS_AT_ONCE = 16;

interface EnsembleRow {
  id: string;
  atoms: number;
  frames: number;
  chirality: string;
  elements: Buffer;
  bonds: Buffer;
}

/** The property columns of an ensemble in order of arrival, without their numbers. */
export async function findProperties(ensembleId: string) {
  return db
    .select({
      id: columns.id,
      name: columns.name,
      unit: columns.unit,
      rule: columns.rule,
      origin: columns.origin,
      definition: columns.definition,
      quantity: columns.quantity,
      atom: columns.atom,
    })
    .from(columns)
    .where(and(eq(columns.ensembleId, ensembleId), eq(columns.kind, "property")))
    .orderBy(asc(columns.ordinal), asc(columns.id));
}

type FoundProperty = Awaited<ReturnType<typeof findProperties>>[number];

function described(column: FoundProperty): Omit<PropertyValues, "values"> {
  return {
    id: column.id,
    name: column.name,
    unit: column.unit,
    rule: ruleOf(column),
    origin: column.origin,
    definition: column.definition?.type === "observable" ? column.definition : null,
    quantity: column.quantity,
    atoms: column.atom === null ? null : [column.atom - 1],
  };
}

/**
 * Values of property columns over the conformers of a distinct set, those of equivalent atoms merged.
 *
 * @param found columns wanted, as `findProperties` gives them
 */
export async function propertyValues(
  ensemble: EnsembleRow,
  kept: readonly KeptConformer[],
  found: readonly FoundProperty[],
): Promise<PropertyValues[]> {
  const properties: PropertyValues[] = [];
  for (let at = 0; at < found.length; at += COLUMNS_AT_ONCE) {
    const some = found.slice(at, at + COLUMNS_AT_ONCE);
    const rows = await db
      .select({ id: columns.id, data: columns.data })
      .from(columns)
      .where(
        and(
          eq(columns.ensembleId, ensemble.id),
          inArray(
            columns.id,
            some.map((column) => column.id),
          ),
        ),
      );
    const packed = new Map(rows.map((row) => [row.id, row.data]));
    for (const column of some) {
      const data = packed.get(column.id);
      // Removed between the two reads: it is not there any more.
      if (data === undefined) continue;
      const { values, present } = unpackColumn(data, packedFrames(data));
      properties.push({
        ...described(column),
        values: kept.map(({ frame }) => (present[frame - 1] === 1 ? (values[frame - 1] ?? null) : null)),
      });
    }
  }
  return mergeAtoms(ensemble, kept, properties, await findSplits(ensemble.id));
}

/**
 * Per-atom columns get the mean over their equivalent atoms; each column stays a row of its own.
 *
 * @param splits groups taken apart by hand, atoms from 0
 */
export async function mergeAtoms(
  ensemble: EnsembleRow,
  kept: readonly KeptConformer[],
  properties: PropertyValues[],
  splits: readonly (readonly (readonly number[])[])[],
): Promise<PropertyValues[]> {
  const quantities = new Map<string, PropertyValues[]>();
  for (const property of properties) {
    if (property.quantity === null || property.atoms === null) continue;
    const key = `${property.quantity}\n${property.unit ?? ""}\n${property.rule}`;
    const list = quantities.get(key);
    if (list) list.push(property);
    else quantities.set(key, [property]);
  }
  if (quantities.size === 0 || kept.length === 0) return properties;
  const { group, relabel } = await equivalence(ensemble, kept);
  const merged = new Map<PropertyValues, PropertyValues>();
  for (const list of quantities.values()) {
    const atoms = list.map(
      (property): AtomColumn => ({ atom: property.atoms?.[0] ?? 0, values: property.values }),
    );
    const classes = splitClasses(group.classes(atoms.map((column) => column.atom)), splits);
    for (const one of mergeEquivalentAtoms(atoms, classes, relabel)) {
      for (const property of list) {
        if (one.atoms.includes(property.atoms?.[0] ?? -1)) {
          merged.set(property, { ...property, atoms: one.atoms, values: one.values });
        }
      }
    }
  }
  return properties.map((property) => merged.get(property) ?? property);
}

/** Exchanges that keep hands, told from the lowest conformer, and how the others are numbered against it. */
async function equivalence(ensemble: EnsembleRow, kept: readonly KeptConformer[]) {
  const numbers = kept.map(({ frame }) => frame);
  const indices = new Map<number, number>();
  for (let at = 0; at < numbers.length; at += 5_000) {
    const rows = await db
      .select({ number: frames.number, index: frames.indexInShape })
      .from(frames)
      .where(and(eq(frames.ensembleId, ensemble.id), inArray(frames.number, numbers.slice(at, at + 5_000))));
    for (const { number, index } of rows) indices.set(number, index ?? -1);
  }
  const positions = await loadPositions(
    ensemble.id,
    ensemble.atoms,
    numbers.map((number) => indices.get(number) ?? -1),
  );
  const length = 3 * ensemble.atoms;
  const group = new ParityGroup(
    unpackMolecule(ensemble),
    positions.subarray(0, length),
    ensemble.chirality === "achiral",
  );
  const maps = numbers.map((_, row) => group.relabelling(positions, row * length));
  return { group, relabel: (row: number) => maps[row] ?? null };
}

import { and, asc, desc, eq, inArray, isNotNull, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembles, outsideStructures, sources } from "../../db/schema.server.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { unusedEnergy } from "../../lib/outside/unused-energy.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import { acceptedFrames } from "../ensembles/accepted-frames.server.ts";
import { type OutsideData, outsideDataSchema } from "./outside-data.ts";

export interface OutsideView {
  id: string;
  name: string;
  /** SHA-256 of the original file. */
  sha256: string;
  createdAt: string;
  data: OutsideData;
  /** Where it carries an energy: kcal/mol above the lowest accepted frame at that level; null where that is not known. */
  strain: { levelId: string; levelName: string; kcal: number } | null;
  /** Why no strain is known; null where one is. */
  withoutStrain: string | null;
}

export interface DeletedOutsideView {
  id: string;
  name: string;
  deletedAt: string;
}

/** Structures that were deleted and can be brought back, the last one first. */
export async function listDeletedOutside(ensembleId: string): Promise<DeletedOutsideView[]> {
  const rows = await db
    .select({
      id: outsideStructures.id,
      name: outsideStructures.name,
      deletedAt: outsideStructures.deletedAt,
    })
    .from(outsideStructures)
    .where(and(eq(outsideStructures.ensembleId, ensembleId), isNotNull(outsideStructures.deletedAt)))
    .orderBy(desc(outsideStructures.deletedAt), asc(outsideStructures.id));
  return rows.flatMap(({ id, name, deletedAt }) =>
    deletedAt === null ? [] : [{ id, name, deletedAt: deletedAt.toISOString() }],
  );
}

/** The structures from outside beside an ensemble, oldest first; access has been decided before. */
export async function listOutside(ensembleId: string): Promise<OutsideView[]> {
  const rows = await db
    .select({
      id: outsideStructures.id,
      name: outsideStructures.name,
      data: outsideStructures.data,
      createdAt: outsideStructures.createdAt,
      sha: sources.sha256,
    })
    .from(outsideStructures)
    .innerJoin(sources, eq(sources.id, outsideStructures.sourceId))
    .where(and(eq(outsideStructures.ensembleId, ensembleId), isNull(outsideStructures.deletedAt)))
    .orderBy(asc(outsideStructures.createdAt), asc(outsideStructures.id));
  const parsed = rows.map((row) => ({ ...row, data: outsideDataSchema.parse(row.data) }));
  const wanted = parsed.flatMap(({ data }) => (data.energy === null ? [] : [data.energy.levelId]));
  const lowest = await lowestEnergies(ensembleId, [...new Set(wanted)]);
  return parsed.map(({ id, name, data, createdAt, sha }) => ({
    id,
    name,
    sha256: sha?.toString("hex") ?? "",
    createdAt: createdAt.toISOString(),
    data,
    ...strainOf(data, lowest),
  }));
}

interface LowestEnergy {
  name: string;
  unit: string;
  value: number;
  kcalPerUnit: number;
}

/** The lowest energy of the accepted frames at some levels, in the level's own unit. */
async function lowestEnergies(ensembleId: string, levelIds: string[]): Promise<Map<string, LowestEnergy>> {
  const found = new Map<string, LowestEnergy>();
  if (levelIds.length === 0) return found;
  const { numbers } = await acceptedFrames(ensembleId);
  const levels = await db
    .select({
      id: columns.id,
      name: columns.name,
      unit: columns.unit,
      data: columns.data,
      frames: ensembles.frames,
    })
    .from(columns)
    .innerJoin(ensembles, eq(ensembles.id, columns.ensembleId))
    .where(and(eq(columns.ensembleId, ensembleId), inArray(columns.id, levelIds)));
  for (const { id, name, unit, data, frames } of levels) {
    const energyUnit = ENERGY_UNITS.find((one) => one === unit);
    if (energyUnit === undefined) continue;
    const { values, present } = unpackColumn(data, frames);
    let value = Number.POSITIVE_INFINITY;
    for (const number of numbers) {
      if (present[number - 1] === 1) value = Math.min(value, values[number - 1] ?? value);
    }
    if (Number.isFinite(value))
      found.set(id, { name, unit: energyUnit, value, kcalPerUnit: kcalPer(energyUnit) });
  }
  return found;
}

function strainOf(
  { energy, atoms }: OutsideData,
  lowest: ReadonlyMap<string, LowestEnergy>,
): Pick<OutsideView, "strain" | "withoutStrain"> {
  const without = (withoutStrain: string) => ({ strain: null, withoutStrain });
  if (energy === null) {
    return without(
      "It carries no energy at a level of this ensemble, so its strain is not known. Where it has one, add it again and type it, or write it where the ensemble’s own stand.",
    );
  }
  const level = lowest.get(energy.levelId);
  const unused = unusedEnergy({ atoms, energy }, level);
  if (unused !== null) return without(unused);
  if (level === undefined) {
    return without(
      "It carries an energy at a level that the ensemble no longer has, so its strain is not known.",
    );
  }
  // Subtracted in its own unit, converted once.
  const kcal = (energy.value - level.value) * level.kcalPerUnit;
  return { strain: { levelId: energy.levelId, levelName: level.name, kcal }, withoutStrain: null };
}

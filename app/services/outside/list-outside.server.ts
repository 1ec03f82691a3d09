import { and, asc, eq, inArray, isNull } from "drizzle-orm";
import { db } from "../../db/client.server.ts";
import { columns, ensembles, outsideStructures, sources } from "../../db/schema.server.ts";
import { unpackColumn } from "../../lib/column-data.ts";
import { ENERGY_UNITS, kcalPer } from "../../lib/units.ts";
import { type Actor, accessEnsemble } from "../auth/access.server.ts";
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
}

/** The structures from outside beside an ensemble, oldest first. */
export async function listOutside(options: { actor: Actor; ensembleId: string }): Promise<OutsideView[]> {
  const { ensembleId } = await accessEnsemble(options.actor, "read", options.ensembleId);
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
    strain: strainOf(data, lowest),
  }));
}

interface LowestEnergy {
  name: string;
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
    if (Number.isFinite(value)) found.set(id, { name, value, kcalPerUnit: kcalPer(energyUnit) });
  }
  return found;
}

function strainOf({ energy }: OutsideData, lowest: ReadonlyMap<string, LowestEnergy>): OutsideView["strain"] {
  const level = energy === null ? undefined : lowest.get(energy.levelId);
  if (energy === null || level === undefined) return null;
  // Subtracted in its own unit, converted once.
  const kcal = (energy.value - level.value) * level.kcalPerUnit;
  return { levelId: energy.levelId, levelName: level.name, kcal };
}

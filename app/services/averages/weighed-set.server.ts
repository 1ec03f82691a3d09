import { DomainError } from "../../lib/errors.ts";
import type { SiftRecipe } from "../../lib/recipe/recipe.ts";
import type { KeptConformer } from "../../lib/recipe/result.ts";
import { type DistinctPopulations, distinctPopulations } from "../../lib/thermo/populations.ts";
import type { LevelView } from "../../lib/views.ts";
import { frameStrip } from "../ensembles/accepted-frames.server.ts";
import { findColumns, toLevels } from "../ensembles/find-columns.server.ts";
import type { FoundSift } from "../sifts/find-sift.server.ts";
import { energiesAt, levelOf, needResult } from "../sifts/populations.server.ts";

export interface WeighedSet {
  level: LevelView;
  conformers: KeptConformer[];
  weighed: DistinctPopulations;
  temperatureK: number;
}

/** True where each conformer of the set stands for its mirror image too. */
export function mirrorMerged(recipe: SiftRecipe): boolean {
  return recipe.mirror === "merge" && recipe.chirality === "achiral";
}

/**
 * The conformers of a distinct set with their populations at one temperature.
 *
 * @throws DomainError conflict while the sift is not done; invalid for an unknown level or a sift without energies
 */
export async function weighedSet(
  sift: FoundSift,
  options: { temperatureK: number; weights?: "auto" | "copies" | "degeneracy"; level?: string },
): Promise<WeighedSet> {
  const strip = await frameStrip(sift.ensembleId);
  const level = levelOf(sift, toLevels(await findColumns(sift.ensembleId, strip)), options.level);
  const result = await needResult(sift);
  const { conformers } = await energiesAt(sift, result.kept, level, strip.length);
  const weighed = distinctPopulations(
    conformers,
    level.energyKind,
    options.temperatureK,
    options.weights ?? "auto",
  );
  if (weighed === null) throw refused(`No conformer of this distinct set has an energy at "${level.name}".`);
  return { level, conformers, weighed, temperatureK: options.temperatureK };
}

function refused(message: string): DomainError {
  return new DomainError("invalid", "Nothing to average over", message, {
    faults: [{ field: "level", message }],
  });
}

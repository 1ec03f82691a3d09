import type { OutsideMethod } from "../../lib/outside/methods-text.ts";
import type { SiftRecipe } from "../../lib/recipe/recipe.ts";
import type { SiftResult } from "../../lib/recipe/result.ts";
import { selectAtoms } from "../../lib/structure.ts";
import { unpackMolecule } from "../ensembles/molecule.server.ts";
import { compareOutside, MOST_COMPARED } from "./compare-outside.server.ts";
import { listOutside } from "./list-outside.server.ts";

/** How the structures beside an ensemble are compared with a distinct set, for its methods text; access decided before. */
export async function outsideMethodsOf(
  ensemble: { id: string; atoms: number; elements: Buffer; bonds: Buffer; chirality: string },
  sift: { id: string; recipe: SiftRecipe },
  result: Pick<SiftResult, "kept">,
): Promise<OutsideMethod[]> {
  const structures = await listOutside(ensemble.id);
  if (structures.length === 0) return [];
  const atoms = selectAtoms(unpackMolecule(ensemble), "heavy").length;
  const methods: OutsideMethod[] = [];
  for (const outside of structures) {
    methods.push({
      name: outside.name,
      sha256: outside.sha256,
      set: "heavy",
      atoms,
      conformers: Math.min(result.kept.length, MOST_COMPARED),
      mirror: ensemble.chirality === "achiral",
      strainLevel: await strainLevelOf(ensemble.id, outside, sift, result),
    });
  }
  return methods;
}

/** Name of the level of its strain; null where none is taken. */
async function strainLevelOf(
  ensembleId: string,
  outside: Awaited<ReturnType<typeof listOutside>>[number],
  sift: { id: string; recipe: SiftRecipe },
  result: Pick<SiftResult, "kept">,
): Promise<string | null> {
  const { strain } = outside;
  if (strain === null || strain.levelId !== sift.recipe.level) return null;
  const choice = { set: "heavy", mirror: true } as const;
  const found = await compareOutside({ ensembleId, outside, sift: { id: sift.id, result }, choice });
  return found === null || found.otherConfiguration.length > 0 ? null : strain.levelName;
}

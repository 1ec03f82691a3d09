import { DomainError, type Fault } from "../errors.ts";
import {
  DEFAULT_ENERGY_TOLERANCE_KCAL,
  DEFAULT_RMSD_TOLERANCE,
  type SiftRecipe,
  type SiftRequest,
} from "./recipe.ts";

/** What a recipe has to know of the ensemble. */
export interface EnsembleFacts {
  levels: readonly { id: string; name: string }[];
  /** Outcome of the parity test; "unsure" counts as chiral. */
  chirality: "achiral" | "chiral" | "unsure";
}

/**
 * The complete recipe of a request: every default and `auto` resolved. Requests that mean the same give the same recipe.
 *
 * @throws DomainError invalid, with the field at fault, for an unknown level, an energy window without a level, and
 *   mirror images merged in a molecule that counts as chiral
 * @example resolveRecipe({ level: "MMFF94" }, { levels: [{ id: "a1", name: "MMFF94" }], chirality: "achiral" }).mirror // "merge"
 */
export function resolveRecipe(request: SiftRequest, facts: EnsembleFacts): SiftRecipe {
  const level = request.level === null ? null : findLevel(request.level, facts);
  const window = request.window ?? null;
  if (level === null && window !== null) {
    throw refused(
      "window",
      `An energy window of ${window} kcal/mol needs a level: choose one, or leave the window out.`,
    );
  }
  const found = facts.chirality === "achiral" ? "achiral" : "chiral";
  const asked = request.chirality ?? "auto";
  const chirality = asked === "auto" ? found : asked;
  const mirror = request.mirror ?? "auto";
  if (mirror === "merge" && chirality === "chiral") throw refused("mirror", mergeRefused(asked, facts));
  return {
    version: 1,
    level: level?.id ?? null,
    levelName: level?.name ?? null,
    window,
    energyTolerance: level === null ? null : energyToleranceOf(request),
    rmsdTolerance: positiveZero(request.rmsdTolerance ?? DEFAULT_RMSD_TOLERANCE),
    atoms: request.atoms ?? "heavy+polarH",
    symmetry: request.symmetry ?? true,
    mirror: mirror === "auto" ? (chirality === "achiral" ? "merge" : "keep") : mirror,
    chirality,
    chiralityOverridden: chirality !== found,
  };
}

/**
 * The recipe as text with a fixed order of keys: equal recipes give equal text, whatever object they came in.
 *
 * @example sha256(canonicalRecipe(recipe))
 */
export function canonicalRecipe(recipe: SiftRecipe): string {
  const ordered: SiftRecipe = {
    version: recipe.version,
    level: recipe.level,
    levelName: recipe.levelName,
    window: recipe.window,
    energyTolerance: recipe.energyTolerance,
    rmsdTolerance: recipe.rmsdTolerance,
    atoms: recipe.atoms,
    symmetry: recipe.symmetry,
    mirror: recipe.mirror,
    chirality: recipe.chirality,
    chiralityOverridden: recipe.chiralityOverridden,
  };
  return JSON.stringify(ordered);
}

function findLevel(asked: string, { levels }: EnsembleFacts): { id: string; name: string } {
  const level = levels.find(({ id }) => id === asked) ?? levels.find(({ name }) => name === asked);
  if (level) return level;
  const names = levels.map(({ name }) => `“${name}”`).join(", ");
  const known = names === "" ? "it has none; null sifts in file order" : `it has ${names}`;
  throw refused("level", `The ensemble has no level “${asked}”: ${known}.`);
}

function energyToleranceOf(request: SiftRequest): number | null {
  const asked = request.energyTolerance;
  return asked === undefined ? DEFAULT_ENERGY_TOLERANCE_KCAL : asked === null ? null : positiveZero(asked);
}

/** -0 passes every schema and would be another text. */
function positiveZero(value: number): number {
  return value === 0 ? 0 : value;
}

function mergeRefused(asked: "auto" | "achiral" | "chiral", facts: EnsembleFacts): string {
  const why =
    asked === "chiral"
      ? "The request calls the molecule chiral"
      : facts.chirality === "chiral"
        ? "The molecule is chiral"
        : "It is not sure that the molecule is achiral, so it counts as chiral";
  return (
    `${why}: the mirror image of a conformer belongs to the other enantiomer and must not be merged with it. ` +
    'Keep mirror images apart, or state that the molecule is achiral (chirality: "achiral").'
  );
}

function refused(field: keyof SiftRequest, message: string): DomainError {
  const faults: Fault[] = [{ field, message }];
  return new DomainError("invalid", "The sift cannot be run as asked", message, { faults });
}

import { formatEnergy, formatRmsd, formatTemperature, withUnit } from "../format.ts";
import {
  DEFAULT_ENERGY_TOLERANCE_KCAL,
  DEFAULT_RMSD_TOLERANCE,
  type SiftRecipe,
  type SiftRequest,
} from "../recipe/recipe.ts";
import type { EnergyKind } from "../views.ts";

/** Atom sets as the page names them. */
export const ATOM_SET_WORDS: Record<SiftRecipe["atoms"], string> = {
  heavy: "heavy atoms",
  "heavy+polarH": "heavy atoms and polar H",
  all: "all atoms",
};

/** Kinds of energy as the page names them. */
export const ENERGY_KIND_WORDS: Record<EnergyKind, string> = {
  electronic: "electronic energies",
  "zero-point": "energies with zero-point",
  enthalpy: "enthalpies",
  free: "free energies",
};

/** What populations from a kind of energy are called. */
export const POPULATION_WORDS: Record<EnergyKind, string> = {
  electronic: "Electronic energy populations",
  "zero-point": "Populations from energies with zero-point",
  enthalpy: "Populations from enthalpies",
  free: "Free energy populations",
};

/** The recipe as the foot of the page says it, without a full stop. */
export function recipeLine(recipe: SiftRecipe, temperatureK: number | null): string {
  const parts = [
    recipe.levelName === null ? "no energies, file order" : `${recipe.levelName} energies`,
    temperatureK === null ? null : withUnit(formatTemperature(temperatureK), "K"),
    recipe.window === null ? null : `window ${withUnit(formatEnergy(recipe.window), "kcal/mol")}`,
    recipe.level === null
      ? null
      : recipe.energyTolerance === null
        ? "no energy tolerance"
        : `energy tolerance ${withUnit(formatEnergy(recipe.energyTolerance), "kcal/mol")}`,
    `RMSD tolerance ${withUnit(formatRmsd(recipe.rmsdTolerance), "Å")}`,
    ATOM_SET_WORDS[recipe.atoms],
    recipe.symmetry ? "symmetry on" : "symmetry off",
    recipe.mirror === "merge" ? "mirror images merged" : "mirror images kept apart",
    recipe.chiralityOverridden ? `taken as ${recipe.chirality} by choice` : null,
  ];
  return parts.filter((part) => part !== null).join(", ");
}

/** What must be asked to get this recipe again; settings change one field of it. */
export function requestOf(recipe: SiftRecipe): SiftRequest {
  return {
    level: recipe.level,
    window: recipe.window,
    energyTolerance: recipe.energyTolerance,
    rmsdTolerance: recipe.rmsdTolerance,
    atoms: recipe.atoms,
    symmetry: recipe.symmetry,
    mirror: recipe.mirror === autoMirror(recipe.chirality) ? "auto" : recipe.mirror,
    chirality: recipe.chiralityOverridden ? recipe.chirality : "auto",
  };
}

/** What "auto" does with mirror images. */
export function autoMirror(chirality: "achiral" | "chiral"): "merge" | "keep" {
  return chirality === "achiral" ? "merge" : "keep";
}

/** The settings that every sift starts from, on the level of this one: whoever chose nothing gets these. */
export function defaultsOf(recipe: SiftRecipe): SiftRecipe {
  const other = recipe.chirality === "achiral" ? "chiral" : "achiral";
  const chirality = recipe.chiralityOverridden ? other : recipe.chirality;
  return {
    ...recipe,
    window: null,
    energyTolerance: recipe.level === null ? null : DEFAULT_ENERGY_TOLERANCE_KCAL,
    rmsdTolerance: DEFAULT_RMSD_TOLERANCE,
    atoms: "heavy+polarH",
    symmetry: true,
    mirror: autoMirror(chirality),
    chirality,
    chiralityOverridden: false,
  };
}

/**
 * What one recipe has that another has not, setting by setting.
 *
 * @returns each as it is in `recipe`, and as it is in `other`
 * @example settingsApart({ ...recipe, atoms: "all" }, recipe) // [{ is: "all atoms", was: "heavy atoms" }]
 */
export function settingsApart(recipe: SiftRecipe, other: SiftRecipe): { is: string; was: string }[] {
  const both = (words: (one: SiftRecipe) => string) => ({ is: words(recipe), was: words(other) });
  const pairs = [
    both((one) => (one.levelName === null ? "no energies, file order" : `${one.levelName} energies`)),
    both(({ rmsdTolerance }) => `RMSD tolerance ${withUnit(formatRmsd(rmsdTolerance), "Å")}`),
    // Without energies there is none to choose: the level says it.
    recipe.level === null || other.level === null
      ? null
      : both(({ energyTolerance }) =>
          energyTolerance === null
            ? "no energy tolerance"
            : `energy tolerance ${withUnit(formatEnergy(energyTolerance), "kcal/mol")}`,
        ),
    both(({ window }) =>
      window === null ? "no energy window" : `energy window ${withUnit(formatEnergy(window), "kcal/mol")}`,
    ),
    both(({ atoms }) => ATOM_SET_WORDS[atoms]),
    both(({ symmetry }) => (symmetry ? "symmetry on" : "symmetry off")),
    both(({ mirror }) => (mirror === "merge" ? "mirror images merged" : "mirror images kept apart")),
    both(({ chirality }) => `taken as ${chirality}`),
  ];
  return pairs.flatMap((pair) => (pair !== null && pair.is !== pair.was ? [pair] : []));
}

import {
  fixed,
  formatCount,
  formatEnergy,
  formatRmsd,
  formatTemperature,
  plural,
  withUnit,
} from "../format.ts";
import type { SiftRecipe, SiftRequest } from "../recipe/recipe.ts";
import type { SiftResult } from "../recipe/result.ts";
import { CONSTANTS_YEAR } from "../units.ts";
import type { EnergyKind, EnsembleView } from "../views.ts";

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

/** One paragraph for a report, from what is stored: nothing that was not done is claimed. */
export function methodsText(options: {
  ensemble: EnsembleView;
  recipe: SiftRecipe;
  result: SiftResult;
  energyKind: EnergyKind | null;
  weights: { kind: "copies" | "degeneracy" } | null;
  temperatureK: number;
}): string {
  const { ensemble, recipe, result } = options;
  const sentences = [
    `${plural(ensemble.frames, "structure")} of ${ensemble.formula} (${plural(ensemble.atoms, "atom")}) were read; ` +
      `${formatCount(ensemble.accepted)} were accepted and ${ensemble.held === 0 ? "none" : formatCount(ensemble.held)} held back.`,
    windowSentence(recipe, result),
    ruleSentence(recipe),
    mirrorSentence(recipe),
    `This left ${plural(result.kept.length, "distinct conformer")} out of ${plural(result.kept.length + result.dropped.length, "structure")}.`,
    weightsSentence(options),
  ];
  return sentences.filter((sentence) => sentence !== null).join(" ");
}

function windowSentence(recipe: SiftRecipe, result: SiftResult): string | null {
  const parts: string[] = [];
  if (recipe.window !== null)
    parts.push(
      `Structures more than ${withUnit(formatEnergy(recipe.window), "kcal/mol")} above the lowest were left out (${result.outsideWindow.length}).`,
    );
  if (result.withoutEnergy.length > 0)
    parts.push(`${plural(result.withoutEnergy.length, "structure")} without an energy took no part.`);
  return parts.length === 0 ? null : parts.join(" ");
}

function ruleSentence(recipe: SiftRecipe): string {
  const order =
    recipe.level === null
      ? "in the order of the file"
      : `in the order of their energies (${recipe.levelName}), from the lowest`;
  const energy =
    recipe.level === null || recipe.energyTolerance === null
      ? ""
      : `its energy lay within ${withUnit(formatEnergy(recipe.energyTolerance), "kcal/mol")} of it and `;
  const atoms = {
    heavy: "the heavy atoms",
    "heavy+polarH": "the heavy atoms and the hydrogens on N, O, S and P",
    all: "all atoms",
  }[recipe.atoms];
  const symmetry = recipe.symmetry
    ? ", minimised over the automorphisms of the bonded graph"
    : ", atoms compared in file order";
  return (
    `Repeats were removed ${order}: a structure was taken to repeat one already kept when ${energy}` +
    `the root-mean-square deviation of ${atoms} after superposition by a proper rotation${symmetry}, ` +
    `was at most ${withUnit(fixed(recipe.rmsdTolerance, 3), "Å")}.`
  );
}

function mirrorSentence(recipe: SiftRecipe): string {
  const taken = recipe.chiralityOverridden
    ? `was taken as ${recipe.chirality} by choice`
    : `is ${recipe.chirality}`;
  return recipe.mirror === "merge"
    ? `The molecule ${taken}; mirror images were counted as one conformer of degeneracy 2.`
    : `The molecule ${taken}; mirror images were kept apart.`;
}

function weightsSentence(options: Parameters<typeof methodsText>[0]): string | null {
  if (options.weights === null || options.energyKind === null) return null;
  const by =
    options.weights.kind === "copies"
      ? "each conformer counted degeneracy over symmetry number times"
      : "each conformer counted with its mirror degeneracy";
  return (
    `Boltzmann populations at ${withUnit(formatTemperature(options.temperatureK), "K")} are from ` +
    `${ENERGY_KIND_WORDS[options.energyKind]}, ${by}; constants ${CONSTANTS_YEAR}.`
  );
}

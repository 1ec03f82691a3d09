import { fixed, formatCount, formatEnergy, formatTemperature, plural, withUnit } from "../format.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import { CONSTANTS_YEAR } from "../units.ts";
import type { EnergyKind } from "../views.ts";
import { ENERGY_KIND_WORDS } from "../workbench/recipe-words.ts";

/** What the methods text is written from: counts and parameters of one distinct set, nothing that was not done. */
export interface MethodsInput {
  formula: string;
  atoms: number;
  files: readonly { format: string; sha256: string }[];
  frames: number;
  accepted: number;
  held: number;
  recipe: Omit<SiftRecipe, "level">;
  kept: number;
  dropped: number;
  outsideWindow: number;
  withoutEnergy: number;
  /** Conformers and repeats whose RMSD could only be bounded from above. */
  upperBounds: number;
  level: { energyKind: EnergyKind; kindStated: boolean } | null;
  /** Null where there are no populations. */
  populations: { temperature: number; weights: "copies" | "degeneracy"; weightsChosen: boolean } | null;
  /** Sentences of further results, each complete. */
  further?: readonly string[];
  /** Of the product. */
  version: string;
}

export interface MethodsText {
  /** One paragraph, ready for a report. */
  text: string;
  /** What a person assumed and no computation showed: one sentence each. */
  assumptions: string[];
}

/** Where the methods come from: journal, year, volume, page. */
const SOURCES = {
  radii: "Dalton Trans. 2008, 2832",
  superposition: "J. Opt. Soc. Am. A 1987, 4, 629; Acta Cryst. A 2005, 61, 478",
  exchange: "Mol. Phys. 1963, 6, 445",
  boltzmann: "Chem. Rev. 2009, 109, 4092",
  effective: "Ecology 1973, 54, 427",
} as const;

/**
 * The methods paragraph of a report, from what is stored, with its sources; and the assumptions in it that are a person's.
 *
 * @example methodsText(input).text.startsWith("400 structures")
 */
export function methodsText(input: MethodsInput): MethodsText {
  const sentences = [
    readSentence(input),
    windowSentence(input),
    ruleSentence(input.recipe),
    mirrorSentence(input.recipe),
    `This left ${plural(input.kept, "distinct conformer")} out of ${plural(input.kept + input.dropped, "structure")}.`,
    input.upperBounds > 0
      ? `Of ${plural(input.upperBounds, "comparison")} only an upper bound of the deviation is known.`
      : null,
    weightsSentence(input),
    ...(input.further ?? []),
    `Computed with Lowlying ${input.version}.`,
  ];
  return {
    text: sentences.filter((sentence) => sentence !== null).join(" "),
    assumptions: assumptionsOf(input),
  };
}

function readSentence({ frames, formula, atoms, files, accepted, held }: MethodsInput): string {
  const formats = [...new Set(files.map(({ format }) => format.split(",", 1)[0] ?? format))];
  const of = files.length === 1 ? `one ${formats[0]} file` : `${files.length} ${formats.join(" and ")} files`;
  const sums = files.map(({ sha256 }) => `${sha256.slice(0, 8)} … ${sha256.slice(-4)}`).slice(0, 4);
  const more = files.length > sums.length ? ` and ${files.length - sums.length} more` : "";
  const back =
    held === 0
      ? "all were accepted"
      : `${formatCount(accepted)} were accepted and ${formatCount(held)} held back`;
  return (
    `${plural(frames, "structure")} of ${formula} (${plural(atoms, "atom")}) were read from ${of} ` +
    `(SHA-256 ${sums.join(", ")}${more}); ${back}. ` +
    `Bonds were found from distances and covalent radii (${SOURCES.radii}); structures with other bonds or another configuration never enter.`
  );
}

function windowSentence({ recipe, outsideWindow, withoutEnergy }: MethodsInput): string | null {
  const parts: string[] = [];
  if (recipe.window !== null)
    parts.push(
      `Structures more than ${withUnit(formatEnergy(recipe.window), "kcal/mol")} above the lowest were left out (${formatCount(outsideWindow)}).`,
    );
  if (withoutEnergy > 0) parts.push(`${plural(withoutEnergy, "structure")} without an energy took no part.`);
  return parts.length === 0 ? null : parts.join(" ");
}

const ATOM_WORDS: Record<SiftRecipe["atoms"], string> = {
  heavy: "the heavy atoms",
  "heavy+polarH": "the heavy atoms and the hydrogens on N, O, S and P",
  all: "all atoms",
};

function ruleSentence(recipe: MethodsInput["recipe"]): string {
  const order =
    recipe.levelName === null
      ? "in the order of the file"
      : `in the order of their energies (${recipe.levelName}), from the lowest`;
  const energy =
    recipe.levelName === null || recipe.energyTolerance === null
      ? ""
      : `its energy lay within ${withUnit(formatEnergy(recipe.energyTolerance), "kcal/mol")} of it and `;
  const symmetry = recipe.symmetry
    ? ", minimised over all exchanges of equivalent atoms of the bonded graph"
    : ", atoms compared in file order";
  return (
    `Repeats were removed ${order}: a structure was taken to repeat one already kept when ${energy}` +
    `the root-mean-square deviation of ${ATOM_WORDS[recipe.atoms]} after superposition by a proper rotation ` +
    `(${SOURCES.superposition})${symmetry}, was at most ${withUnit(fixed(recipe.rmsdTolerance, 3), "Å")}.`
  );
}

function mirrorSentence(recipe: MethodsInput["recipe"]): string {
  const taken = recipe.chiralityOverridden
    ? `was taken as ${recipe.chirality}`
    : recipe.chirality === "achiral"
      ? "is achiral"
      : "counts as chiral";
  return recipe.mirror === "merge"
    ? `The molecule ${taken}; a chiral conformer and its mirror image were counted as one of degeneracy 2.`
    : `The molecule ${taken}; mirror images were kept apart.`;
}

function weightsSentence({ level, populations }: MethodsInput): string | null {
  if (level === null || populations === null) return null;
  const by =
    populations.weights === "copies"
      ? `each conformer counted degeneracy over symmetry number times (${SOURCES.exchange})`
      : "each conformer counted with its mirror degeneracy";
  return (
    `Populations follow g exp(−E/RT) (${SOURCES.boltzmann}) with ${ENERGY_KIND_WORDS[level.energyKind]} at ` +
    `${withUnit(formatTemperature(populations.temperature), "K")}, ${by}; the effective number of conformers is ` +
    `exp(S/R) (${SOURCES.effective}); constants ${CONSTANTS_YEAR}.`
  );
}

function assumptionsOf({ recipe, level, populations, held }: MethodsInput): string[] {
  const found: string[] = [];
  if (recipe.chiralityOverridden) {
    found.push(
      `That the molecule is ${recipe.chirality} was stated by a person; the parity test says otherwise.`,
    );
  }
  if (level !== null && !level.kindStated) {
    found.push("The energies were taken as electronic, since nobody said which kind they are.");
  }
  if (populations?.weightsChosen) {
    found.push(`The weights (${populations.weights}) were chosen by a person, not by the kind of energy.`);
  }
  if (!recipe.symmetry) found.push("Equivalent atoms were not exchanged: that was chosen by a person.");
  found.push(
    "The tolerances are settings of this work, not published thresholds" +
      (held > 0 ? "; what was held back was decided at intake or by a person." : "."),
  );
  return found;
}

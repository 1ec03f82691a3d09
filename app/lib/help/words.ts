/** One word of the product or of the trade, as every page, export and call uses it. */
export interface Word {
  word: string;
  /** In plain language, one or two sentences; other words of the list are used in its sense. */
  means: string;
  /** Section of the methods page that computes it. */
  method?: string;
}

export interface WordGroup {
  id: string;
  title: string;
  words: readonly Word[];
}

const WORK: readonly Word[] = [
  {
    word: "Team",
    means: "The people who see the same work. What a team holds is invisible to everybody else.",
  },
  {
    word: "Series",
    means: "A folder of ensembles that belong together: a compound series, or a question.",
  },
  {
    word: "Ensemble",
    means: "The conformers of one molecule, with the files they came in, their frames and their columns.",
  },
  {
    word: "Frame",
    means:
      "One structure of a file: atoms and their positions. Frames are numbered from 1 in file order, on through all files.",
  },
  {
    word: "Intake",
    means:
      "Reading files in, and the report on it: which frames were accepted, accepted with a remark, or held.",
  },
  {
    word: "Held",
    means:
      "A frame that is kept but left out of every computation, with the reason. Some can be released; a frame of another species cannot, but it can become an ensemble of its own.",
    method: "bonds",
  },
  {
    word: "Column",
    means:
      "One quantity over the conformers, with its unit: an energy at a level, a property, or a property of one atom.",
  },
  {
    word: "Recipe",
    means:
      "All settings of a computation. The same recipe on the same data gives the same digits, on any machine.",
    method: "digits",
  },
  {
    word: "Edition",
    means:
      "A numbered picture of an ensemble’s results that nobody can change, with its recipe, versions and checksums.",
  },
  {
    word: "Checksum",
    means:
      "A number computed from the bytes of a file (SHA-256). Two files with the same checksum are the same file.",
  },
  {
    word: "Hand-over",
    means: "Passing results on: files for the next program, and read-only links to an edition.",
  },
  {
    word: "Read-only link",
    means:
      "An address that shows one edition and nothing else, to whoever has it, without an account, until its end date or until somebody ends it.",
  },
  {
    word: "Logbook",
    means: "The record of who did and decided what. It only grows; nobody can change or remove an entry.",
  },
  {
    word: "Token",
    means:
      "A secret by which a program acts as its person within one team. It can be narrowed to reading or to adding files, and revoked.",
  },
];

const SHAPES: readonly Word[] = [
  {
    word: "Conformer",
    means:
      "A shape of a molecule that turns into its other shapes by rotation about bonds, without a bond being broken.",
  },
  {
    word: "Species",
    means:
      "Which atoms are bonded to which. A frame with other bonds than the rest is another species, and is never averaged in.",
    method: "bonds",
  },
  {
    word: "Configuration",
    means:
      "The arrangement at stereocentres and double bonds, which no rotation about single bonds changes. Two configurations are two compounds.",
    method: "bonds",
  },
  {
    word: "RMSD",
    means:
      "Root-mean-square deviation: how far, in Å, the atoms of two structures lie apart once one is laid over the other as well as it can be. Atoms that are equivalent may change places; mirror images do not count as the same unless that is asked for.",
    method: "rmsd",
  },
  {
    word: "Sift",
    means:
      "Reducing the accepted frames to the distinct set, by a rule. Each dropped frame names the conformer that it repeats.",
    method: "distinct-set",
  },
  {
    word: "Distinct set",
    means: "What a sift keeps: each conformer once, with its degeneracy and how often it was found.",
    method: "distinct-set",
  },
  {
    word: "Tolerance",
    means:
      "How far apart two frames may lie, in RMSD and in energy, and still count as the same conformer. It is a setting, shown beside every result.",
    method: "distinct-set",
  },
  {
    word: "Found",
    means:
      "In how many frames a conformer was met, itself included. It says how well the search covers it, and is no weight.",
    method: "sampling",
  },
  {
    word: "Degeneracy",
    means:
      "2 where a conformer stands for itself and for its mirror image, which is another shape of equal energy; else 1.",
    method: "symmetry",
  },
  {
    word: "Symmetry number",
    means:
      "By how many rotations a conformer falls back onto itself with equal atoms exchanged. A symmetric shape has fewer distinct arrangements, so it weighs less.",
    method: "symmetry",
  },
  {
    word: "Copies",
    means:
      "Degeneracy divided by symmetry number, scaled to the smallest: the weight of a conformer beside its energy.",
    method: "symmetry",
  },
];

const NUMBERS: readonly Word[] = [
  {
    word: "Level of theory",
    means:
      "The method by which energies were computed, level for short. Levels differ in price and in error; each keeps one hue and one marker everywhere.",
    method: "levels",
  },
  {
    word: "Relative energy",
    means: "Energy above the lowest conformer, in kcal/mol.",
    method: "populations",
  },
  {
    word: "Energy window",
    means:
      "How far above the lowest conformer the energies that are carried on may lie. What lies outside is counted, never lost.",
    method: "levels",
  },
  {
    word: "Population",
    means:
      "The share of the molecules that have a shape at a temperature, in per cent: larger for lower energy. It carries the error of the level.",
    method: "populations",
  },
  {
    word: "Conformational free energy",
    means:
      "The energy of the ensemble as a whole at a temperature, below that of its lowest conformer because there are several shapes to choose from.",
    method: "populations",
  },
  {
    word: "Effective count",
    means:
      "How many equally populated shapes would be as mixed as this ensemble: 1 where one shape has it all.",
    method: "populations",
  },
  {
    word: "Boltzmann-weighted average",
    means:
      "A quantity averaged over the conformers, each counted by its population: what an experiment on the whole flask sees.",
    method: "averages",
  },
  {
    word: "Rule",
    means:
      "How a quantity is averaged: linear, by the inverse sixth or third power of a distance, or circular for angles.",
    method: "averages",
  },
  {
    word: "Coupling",
    means:
      "The splitting in an NMR spectrum between two nuclei, in Hz; over three bonds it hangs on the torsion between them.",
    method: "measures",
  },
  {
    word: "Shift",
    means: "The place of a nucleus’s signal in an NMR spectrum, in parts per million (ppm).",
    method: "averages",
  },
  {
    word: "Level error",
    means:
      "How far the energies of a level are typically off, as a standard deviation in kcal/mol. It makes the ranges beside populations and averages.",
    method: "level-error",
  },
  {
    word: "95 % range",
    means:
      "Where a figure lies in 95 of 100 draws of the energies within the level error. It holds the error of the level, not that of missing shapes.",
    method: "level-error",
  },
  {
    word: "Coverage",
    means:
      "The share of the population for which a property has a value. What is missing is left out and said, never taken as zero.",
    method: "averages",
  },
];

/** Every word with a meaning of its own here, defined once. */
export const WORD_GROUPS: readonly WordGroup[] = [
  { id: "work", title: "The work", words: WORK },
  { id: "shapes", title: "Shapes", words: SHAPES },
  { id: "numbers", title: "Numbers", words: NUMBERS },
];

/**
 * The place of a word on its page.
 *
 * @example wordId("Distinct set") // "distinct-set"
 */
export function wordId(word: string): string {
  return word
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, "-")
    .replace(/^-|-$/g, "");
}

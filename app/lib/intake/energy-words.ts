import type { EnergyUnit } from "../units.ts";
import type { CommentNumber, ScannedComment } from "./comment-numbers.ts";
import { parseEnergyUnit, unitOfName } from "./energy-units.ts";
import { remember } from "./remember.ts";

/**
 * What a number of a comment line may be, by the words round it:
 * "energy" is named as one, "unit" has only a unit of energy bound to it, "loose" has decimals and no name, "whole" has
 * neither; "other" is named as something else, counts, or is one of several in an array.
 */
export type NumberClass = "energy" | "unit" | "loose" | "whole" | "other";

const set = (words: string) => new Set(words.split(" "));

const ENERGY_WORDS = set(
  "energy energies enthalpy gibbs helmholtz e g h etot etotal toten epot escf eelec erel ezpe scf hf uhf rhf dft mp ccsd",
);
/** Quantities that are no energies of a conformer even where an energy stands in their name. */
const MEASURES = set(
  "gap homo lumo error err std sigma tol tolerance threshold gradient grad gnorm norm force forces fmax rms rmsd rmsf " +
    "time t temperature temp step steps iter iteration iterations cycle cycles dipole charge mult multiplicity spin " +
    "weight weights pop population prob probability boltzmann distance dist angle dihedral torsion phi psi chi omega " +
    "mass volume vol pressure density freq frequency frequencies degeneracy entropy unit units rg radius sasa cutoff " +
    "window change virial stress version date seed cpu wall",
);
/** Words before a number that counts or names (row E04). */
const COUNTERS = set(
  "conf confs conformer conformers conformation frame frames model structure struct id index idx no nr num " +
    "number rank cluster atom atoms run job snapshot image name label title comment source file",
);
/** Units behind numbers that are no energies. */
const OTHER_UNITS = set("fs ps ns sec min å angstrom angstroms bohr deg degrees ° debye % amu bar atm");
/** Those of one letter: a label as well, so they count as written, and behind what such a quantity can be. */
const LETTER_UNITS = set("A s D u K");

/** Parts of a name: `MMFF94_ENERGY_KCAL_MOL`, `E(RHF)`, `totalEnergy`. */
const nameWords = remember((name): readonly string[] => {
  return name
    .slice(0, 200)
    .replace(/[Δδ∆]/g, "delta ")
    .replace(/([a-z])([A-Z])/g, "$1 $2")
    .toLowerCase()
    .split(/[^\p{L}°%]+/u)
    .filter((word) => word !== "");
});

const classOfName = remember((name): NumberClass | null => {
  const words = nameWords(name);
  if (words.some((word) => MEASURES.has(word))) return "other";
  if (words.some((word) => ENERGY_WORDS.has(word))) return "energy";
  // "conf 7" leaves its number to count; "conf_0007" has it in itself.
  return !/\d/.test(name) && words.some((word) => COUNTERS.has(word)) ? "other" : null;
});

/** Whether a key names an energy: `E`, `total_energy`, `E(RHF)`, but not `energy_gap` or `time`. */
export function namesEnergy(key: string): boolean {
  return classOfName(key) === "energy" && !/unit/i.test(key);
}

/** A key that is a unit in brackets leaves the name to the word before it: `E [eV] = -1.5`. */
function isUnitKey(key: string): boolean {
  return parseEnergyUnit(key) !== null;
}

/**
 * Class of one number of a comment.
 *
 * @example classify(scanComment("time = 5500").numbers[0]!) // "other"
 */
export function classify(number: CommentNumber): NumberClass {
  if (number.inArray) return "other";
  const { key } = number;
  const named = key === null || isUnitKey(key) ? classOfWords(number.words) : classOfName(key);
  if (named !== null) return named;
  if (hasOtherUnit(number)) return "other";
  if (number.unit !== null && number.unit !== "K" && number.unit !== "cm-1") return "unit";
  return /[.eEdD]/.test(number.text) ? "loose" : "whole";
}

/**
 * `1.54 A` is a length and `1.85 D` a dipole, but `-76.026 A` is neither, and the `a` of `-76.026 a` a word: lengths,
 * times, dipoles, masses and temperatures are never negative.
 */
function hasOtherUnit({ next, value }: CommentNumber): boolean {
  if (next.length === 1 && LETTER_UNITS.has(next)) return value === null || value >= 0;
  return OTHER_UNITS.has(next.toLowerCase());
}

/** The nearest word that says anything decides; three are looked at. */
function classOfWords(words: readonly string[]): NumberClass | null {
  for (const word of words.slice(-3).reverse()) {
    // "H 1.5 2.5 3.5" is an atom on the line of a lost comment, "H = -76.4" an enthalpy.
    if (word === "H") continue;
    const named = classOfName(word);
    if (named !== null) return named;
  }
  return null;
}

/**
 * The unit bound to a number: behind it, in its key, in brackets before it, or in a key of its own such as
 * `energy_unit`; null where the comment gives none.
 */
export function boundUnit(number: CommentNumber, comment: ScannedComment): EnergyUnit | null {
  if (number.unit !== null) return number.unit;
  if (number.key !== null) {
    const unit = isUnitKey(number.key) ? parseEnergyUnit(number.key) : unitOfName(number.key);
    if (unit !== null) return unit;
  }
  for (const word of number.words.slice(-3).reverse()) {
    const unit = word.length > 1 ? parseEnergyUnit(word) : null;
    if (unit !== null) return unit;
  }
  return companionUnit(number, comment);
}

function companionUnit(number: CommentNumber, comment: ScannedComment): EnergyUnit | null {
  const names = new Set(["unit", "units", "energy_unit", "energy_units"]);
  if (number.key !== null) {
    const own = number.key.toLowerCase();
    for (const [key, entry] of comment.keyed) {
      const lower = key.toLowerCase();
      if (lower === `${own}_unit` || lower === `${own}_units`) return parseEnergyUnit(entry.text);
    }
  }
  if (classify(number) !== "energy") return null;
  for (const [key, entry] of comment.keyed) {
    if (names.has(key.toLowerCase())) return parseEnergyUnit(entry.text);
  }
  return null;
}

/**
 * Whether words round a number say that it is relative: then its unit cannot be checked against the atoms (row E09).
 */
export function saysRelative(number: CommentNumber): boolean {
  const words = [...number.words, number.key ?? ""].flatMap(nameWords);
  return words.some((word) => /^(?:rel|relative|delta|d|erel)$/.test(word));
}

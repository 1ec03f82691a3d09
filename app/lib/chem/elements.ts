/**
 * The elements: symbols, covalent radii, standard atomic weights, and the reading of an atom's name in a file.
 */

// biome-ignore format: one period a row
const symbols = [
  "X", "H", "He",
  "Li", "Be", "B", "C", "N", "O", "F", "Ne",
  "Na", "Mg", "Al", "Si", "P", "S", "Cl", "Ar",
  "K", "Ca", "Sc", "Ti", "V", "Cr", "Mn", "Fe", "Co", "Ni", "Cu", "Zn", "Ga", "Ge", "As", "Se", "Br", "Kr",
  "Rb", "Sr", "Y", "Zr", "Nb", "Mo", "Tc", "Ru", "Rh", "Pd", "Ag", "Cd", "In", "Sn", "Sb", "Te", "I", "Xe",
  "Cs", "Ba", "La", "Ce", "Pr", "Nd", "Pm", "Sm", "Eu", "Gd", "Tb", "Dy", "Ho", "Er", "Tm", "Yb", "Lu",
  "Hf", "Ta", "W", "Re", "Os", "Ir", "Pt", "Au", "Hg", "Tl", "Pb", "Bi", "Po", "At", "Rn",
  "Fr", "Ra", "Ac", "Th", "Pa", "U", "Np", "Pu", "Am", "Cm", "Bk", "Cf", "Es", "Fm", "Md", "No", "Lr",
  "Rf", "Db", "Sg", "Bh", "Hs", "Mt", "Ds", "Rg", "Cn", "Nh", "Fl", "Mc", "Lv", "Ts", "Og",
] as const;

/** Symbols by atomic number; 0 is a dummy atom, "X". */
export const SYMBOLS: readonly string[] = symbols;

/** Largest atomic number with a symbol. */
export const LAST_ELEMENT = 118;

/**
 * Covalent radii in Å by atomic number: Cordero et al., Dalton Trans. 2008, 2832 (sp3 carbon; low-spin Mn, Fe, Co).
 * The table ends at curium; 0 means "no radius", and such atoms form no bonds (dummies too).
 */
// biome-ignore format: one period a row
export const COVALENT_RADII: Float64Array = Float64Array.of(
  0, 0.31, 0.28,
  1.28, 0.96, 0.84, 0.76, 0.71, 0.66, 0.57, 0.58,
  1.66, 1.41, 1.21, 1.11, 1.07, 1.05, 1.02, 1.06,
  2.03, 1.76, 1.7, 1.6, 1.53, 1.39, 1.39, 1.32, 1.26, 1.24, 1.32, 1.22, 1.22, 1.2, 1.19, 1.2, 1.2, 1.16,
  2.2, 1.95, 1.9, 1.75, 1.64, 1.54, 1.47, 1.46, 1.42, 1.39, 1.45, 1.44, 1.42, 1.39, 1.39, 1.38, 1.39, 1.4,
  2.44, 2.15, 2.07, 2.04, 2.03, 2.01, 1.99, 1.98, 1.98, 1.96, 1.94, 1.92, 1.92, 1.89, 1.9, 1.87, 1.87,
  1.75, 1.7, 1.62, 1.51, 1.44, 1.41, 1.36, 1.36, 1.32, 1.45, 1.46, 1.48, 1.4, 1.5, 1.5,
  2.6, 2.21, 2.15, 2.06, 2, 1.96, 1.9, 1.87, 1.8, 1.69, 0, 0, 0, 0, 0, 0, 0,
  0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0,
);

/**
 * Standard atomic weights in g/mol by atomic number, conventional values where the standard is a range:
 * Pure Appl. Chem. 2016, 88, 265 (tables 1 and 3). 0 where no standard weight exists.
 */
// biome-ignore format: one period a row
export const ATOMIC_WEIGHTS: Float64Array = Float64Array.of(
  0, 1.008, 4.002602,
  6.94, 9.0121831, 10.81, 12.011, 14.007, 15.999, 18.998403163, 20.1797,
  22.98976928, 24.305, 26.9815385, 28.085, 30.973761998, 32.06, 35.45, 39.948,
  39.0983, 40.078, 44.955908, 47.867, 50.9415, 51.9961, 54.938044, 55.845, 58.933194, 58.6934, 63.546, 65.38,
  69.723, 72.63, 74.921595, 78.971, 79.904, 83.798,
  85.4678, 87.62, 88.90584, 91.224, 92.90637, 95.95, 0, 101.07, 102.9055, 106.42, 107.8682, 112.414,
  114.818, 118.71, 121.76, 127.6, 126.90447, 131.293,
  132.90545196, 137.327, 138.90547, 140.116, 140.90766, 144.242, 0, 150.36, 151.964, 157.25, 158.92535,
  162.5, 164.93033, 167.259, 168.93422, 173.054, 174.9668,
  178.49, 180.94788, 183.84, 186.207, 190.23, 192.217, 195.084, 196.966569, 200.592, 204.38, 207.2, 208.9804,
  0, 0, 0,
  0, 0, 0, 232.0377, 231.03588, 238.02891, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0,
  0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0,
);

const numberOf = new Map(symbols.map((symbol, z) => [symbol as string, z]));

/**
 * The symbol of an atomic number; 0 is "X", a dummy.
 *
 * @throws RangeError outside 0..118
 * @example symbolOf(17) // "Cl"
 */
export function symbolOf(z: number): string {
  const symbol = SYMBOLS[z];
  if (symbol === undefined) throw new RangeError(`No element has the atomic number ${z}.`);
  return symbol;
}

/**
 * The name of an atom for people: symbol and number from 1.
 *
 * @example atomName([6, 8], 1) // "O2"
 */
export function atomName(elements: ArrayLike<number>, atom: number): string {
  return `${symbolOf(elements[atom]!)}${atom + 1}`;
}

/** What an atom's name in a file means. `isotope` is the mass number, 0 where none is given. */
export type ParsedElement =
  | { kind: "element"; z: number; isotope: number; form: "symbol" | "label" | "number" }
  /** Dummy or ghost (row X19): kept with atomic number 0, left out of bonds, RMSD and masses. */
  | { kind: "dummy" }
  /** Two readings (row X16): the two-letter element, and the one-letter element with a name after it. */
  | { kind: "ambiguous"; code: "X16"; readings: readonly [number, number]; message: string }
  | { kind: "unknown"; code: "X18" | "X20"; message: string };

/**
 * Two-letter names in capitals that stay open: the first letter is an element of its own and the pair is either
 * a usual atom name (alpha carbon CA, gamma sulfur SG, hydroxyl hydrogen HO, ester oxygen OS) or an element that
 * hardly occurs in molecules. Any other capitals (CL, BR, SI, SE, FE, CU, PD, SN) can only mean the element.
 * Common practice, no source; formats row X16 gives CA, CD, HG, NE, CO, HO.
 */
const openCapitals = new Set(
  "BH BK CA CD CE CF CM CN CO CS FL FM FR HE HF HG HO HS NA NB ND NE NH NO NP OG OS PA PB PM PO SG".split(
    " ",
  ),
);

const dummy = /^(?:(?:x|xx|bq|du|\*)(?:[^a-z].*)?|@[a-z].*|gh(?:\(.*\))|[a-z]{1,2}\d*-bq)$/i;

/**
 * Reads an atom's name as files carry it: symbol in any case, label, isotope, atomic number, dummy.
 *
 * Case is free where one element is left (`c`, `CL`); a label's element is its leading letters (`H_12`, `C(ar)`);
 * `D`, `T`, `2H`, `13C` are isotopes, `C13` is a label; `CA` in capitals has two readings. Formats rows X14 to X20.
 *
 * @example parseElement("13C") // { kind: "element", z: 6, isotope: 13, form: "symbol" }
 */
export function parseElement(name: string): ParsedElement {
  const token = name.trim();
  if (/^\d+$/.test(token)) return parseNumber(token);
  if (dummy.test(token)) return { kind: "dummy" };
  const massed = /^(\d{1,3})([A-Za-z]{1,2})$/.exec(token);
  if (massed) return parseIsotope(token, Number(massed[1]), massed[2] ?? "");
  const parts = /^([A-Za-z]{1,2})(?:[^A-Za-z].*)?$/.exec(token);
  const letters = parts?.[1];
  if (letters === undefined) return unknown(token);
  const form = letters.length === token.length ? "symbol" : "label";
  return parseLetters(token, letters, form);
}

function parseNumber(token: string): ParsedElement {
  const z = Number(token);
  if (z >= 1 && z <= LAST_ELEMENT) return { kind: "element", z, isotope: 0, form: "number" };
  const message = `${token} is not an atomic number; they run from 1 to ${LAST_ELEMENT}.`;
  return { kind: "unknown", code: "X18", message };
}

/** `13C`: the mass must suit the element, or else names such as `2HG` would become isotopes. */
function parseIsotope(token: string, mass: number, letters: string): ParsedElement {
  const z = lookUp(letters);
  const possible = z === 1 ? mass >= 1 && mass <= 3 : mass >= 1.5 * z && mass <= 3 * z;
  if (z === 0 || !possible) return unknown(token);
  return { kind: "element", z, isotope: mass, form: "symbol" };
}

function parseLetters(token: string, letters: string, form: "symbol" | "label"): ParsedElement {
  if (/^[dt]$/i.test(letters)) {
    return { kind: "element", z: 1, isotope: letters.toUpperCase() === "D" ? 2 : 3, form };
  }
  const z = lookUp(letters);
  if (z === 0) return unknown(token);
  if (openCapitals.has(letters)) {
    const first = lookUp(letters.slice(0, 1));
    const message = `“${token}” can be ${symbolOf(z)} or ${symbolOf(first)}; capitals leave it open.`;
    return { kind: "ambiguous", code: "X16", readings: [z, first], message };
  }
  return { kind: "element", z, isotope: 0, form };
}

function lookUp(letters: string): number {
  return numberOf.get(letters.slice(0, 1).toUpperCase() + letters.slice(1).toLowerCase()) ?? 0;
}

function unknown(token: string): ParsedElement {
  return { kind: "unknown", code: "X20", message: `“${token}” is not an element symbol.` };
}

import { parseEnergyUnit } from "../intake/energy-units.ts";
import { remember } from "../intake/remember.ts";
import type { EnergyUnit } from "../units.ts";

/** What a unit measures; units of one family can be added. */
export type UnitFamily =
  | "energy"
  | "length"
  | "dipole"
  | "angle"
  | "frequency"
  | "shift"
  | "charge"
  | "mass"
  | "area"
  | "volume"
  | "temperature"
  | "time"
  | "entropy"
  | "share"
  | "number";

export interface KnownUnit {
  /** How the product writes it. */
  unit: string;
  family: UnitFamily;
  /** Of an energy. */
  energy: EnergyUnit | null;
}

/** The ways in which an energy per mole and kelvin is written. */
function entropy(energy: "cal" | "J"): Record<string, readonly [string, UnitFamily]> {
  const written = energy.toLowerCase();
  const unit = [`${energy}/(mol K)`, "entropy"] as const;
  return { [`${written}/mol/k`]: unit, [`${written}/(molk)`]: unit, [`${written}mol-1k-1`]: unit };
}

/** Spelling in lower case without blanks, dots and carets, and the unit. Those whose case counts stand below. */
const SPELLINGS: Readonly<Record<string, readonly [string, UnitFamily]>> = {
  å: ["Å", "length"],
  ang: ["Å", "length"],
  angstrom: ["Å", "length"],
  angstroms: ["Å", "length"],
  ångström: ["Å", "length"],
  nm: ["nm", "length"],
  pm: ["pm", "length"],
  bohr: ["bohr", "length"],
  a0: ["bohr", "length"],
  debye: ["debye", "dipole"],
  ppm: ["ppm", "shift"],
  hz: ["Hz", "frequency"],
  khz: ["kHz", "frequency"],
  "°": ["°", "angle"],
  deg: ["°", "angle"],
  degree: ["°", "angle"],
  degrees: ["°", "angle"],
  rad: ["rad", "angle"],
  radian: ["rad", "angle"],
  radians: ["rad", "angle"],
  mrad: ["mrad", "angle"],
  milliradian: ["mrad", "angle"],
  milliradians: ["mrad", "angle"],
  amu: ["u", "mass"],
  u: ["u", "mass"],
  da: ["u", "mass"],
  "g/mol": ["g/mol", "mass"],
  å2: ["Å²", "area"],
  ang2: ["Å²", "area"],
  a2: ["Å²", "area"],
  nm2: ["nm²", "area"],
  å3: ["Å³", "volume"],
  ang3: ["Å³", "volume"],
  a3: ["Å³", "volume"],
  nm3: ["nm³", "volume"],
  ps: ["ps", "time"],
  fs: ["fs", "time"],
  ns: ["ns", "time"],
  s: ["s", "time"],
  ...entropy("cal"),
  ...entropy("J"),
  "%": ["%", "share"],
  e: ["e", "charge"],
  "1": ["", "number"],
  "-": ["", "number"],
  none: ["", "number"],
};

/** One letter whose case counts. */
const LETTERS: Readonly<Record<string, readonly [string, UnitFamily]>> = {
  A: ["Å", "length"],
  D: ["debye", "dipole"],
  K: ["K", "temperature"],
};

/** Energies by their word alone; "K" and "cm-1" are so only where somebody says that it is an energy. */
const ENERGY_BY_WORD = new Set<EnergyUnit>(["hartree", "kcal/mol", "kJ/mol", "eV", "meV"]);

/**
 * The unit that a text spells, as the product knows it; null for any other text.
 *
 * @example columnUnit("kJ mol-1")?.energy // "kJ/mol"
 * @example columnUnit("D")?.unit // "debye"
 */
export const columnUnit = remember((text): KnownUnit | null => {
  const letter = LETTERS[text.trim()];
  if (letter) return { unit: letter[0], family: letter[1], energy: text.trim() === "K" ? "K" : null };
  const plain = text
    .trim()
    .toLowerCase()
    .replace(/[\s·.*^_]/g, "")
    .replace(/[⁻−–]/g, "-")
    .replaceAll("²", "2")
    .replaceAll("³", "3")
    .replaceAll("¹", "1")
    .replaceAll("\u212b", "å");
  if (Object.hasOwn(SPELLINGS, plain)) {
    const [unit, family] = SPELLINGS[plain] ?? ["", "number"];
    return { unit, family, energy: null };
  }
  const energy = parseEnergyUnit(text);
  return energy === null ? null : { unit: energy, family: "energy", energy };
});

/** Whether a unit alone makes a column an energy. */
export function saysEnergy(unit: KnownUnit | null): boolean {
  return unit?.energy != null && ENERGY_BY_WORD.has(unit.energy);
}

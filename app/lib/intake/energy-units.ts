import type { EnergyUnit } from "../units.ts";
import { remember } from "./remember.ts";

/** Spellings with case, blanks, dots and the like taken out. Row E06. */
const SPELLINGS: Readonly<Record<string, EnergyUnit>> = {
  hartree: "hartree",
  hartrees: "hartree",
  "hartree/particle": "hartree",
  eh: "hartree",
  ha: "hartree",
  au: "hartree",
  ev: "eV",
  electronvolt: "eV",
  electronvolts: "eV",
  mev: "meV",
  kcal: "kcal/mol",
  "kcal/mol": "kcal/mol",
  "kcalmol-1": "kcal/mol",
  kcalmol: "kcal/mol",
  kj: "kJ/mol",
  "kj/mol": "kJ/mol",
  "kjmol-1": "kJ/mol",
  kjmol: "kJ/mol",
  "cm-1": "cm-1",
  "1/cm": "cm-1",
  wavenumber: "cm-1",
  wavenumbers: "cm-1",
  k: "K",
  kelvin: "K",
};

/**
 * The energy unit that a word spells, in any usual spelling; null for any other word.
 *
 * Case counts where it must: `MeV` is no meV, `k` no K.
 *
 * @example parseEnergyUnit("kcal mol^-1") // "kcal/mol"
 * @example parseEnergyUnit("a.u.") // "hartree"
 */
export const parseEnergyUnit = remember((word): EnergyUnit | null => {
  const plain = word
    .replace(/[\s_·.*^()[\]{},;"']/g, "")
    .replace(/[⁻−–]/g, "-")
    .replaceAll("¹", "1")
    .replace(/mole$/i, "mol")
    .replace(/per/i, "/");
  if (plain === "k" || /^M[eE]/.test(plain)) return null;
  const spelling = plain.toLowerCase();
  return Object.hasOwn(SPELLINGS, spelling) ? (SPELLINGS[spelling] ?? null) : null;
});

/**
 * The unit in a key or field name: in brackets, or as its last parts (`E[kJ/mol]`, `MMFF94_ENERGY_KCAL_MOL`, `E/eV`).
 *
 * @example unitOfName("energy_ev") // "eV"
 */
export const unitOfName = remember((name): EnergyUnit | null => {
  const bracketed = /[([{]([^()[\]{}]{1,30})[)\]}]/.exec(name)?.[1];
  if (bracketed !== undefined) {
    const unit = parseEnergyUnit(bracketed);
    if (unit) return unit;
  }
  const parts = name.split(/_+/);
  for (const count of [3, 2, 1]) {
    if (parts.length <= count) continue;
    const unit = suffixUnit(parts.slice(-count).join(" "));
    if (unit) return unit;
  }
  const slash = name.indexOf("/");
  return slash > 0 ? suffixUnit(name.slice(slash + 1)) : null;
});

/** `energy_K` and `energy_h` say too little. */
function suffixUnit(text: string): EnergyUnit | null {
  return text.length < 2 ? null : parseEnergyUnit(text);
}

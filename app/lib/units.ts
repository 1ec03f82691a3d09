/**
 * Physical constants (CODATA 2022) and energy units: the one table of the product.
 * Sources: CODATA 2022 adjustment for hartree and bohr; R, N_A, k, e, h and c are exact by the SI; 1 cal = 4.184 J by definition.
 */
export const CONSTANTS_YEAR = "CODATA 2022";

export const PARTICLES_PER_MOL = 6.02214076e23;
export const GAS_CONSTANT_J = 8.31446261815324; // J/(mol K), exact
export const JOULE_PER_CALORIE = 4.184;
/** R in kcal/(mol K). */
export const GAS_CONSTANT_KCAL = GAS_CONSTANT_J / JOULE_PER_CALORIE / 1000;
export const HARTREE_J = 4.359744722206e-18;
export const HARTREE_EV = 27.211386245981;
export const BOHR_ANGSTROM = 0.529177210544;
const ELEMENTARY_CHARGE_C = 1.602176634e-19;
const PLANCK_J_S = 6.62607015e-34;
const LIGHT_M_S = 299792458;
const BOLTZMANN_J_K = 1.380649e-23;

export const STANDARD_TEMPERATURE_K = 298.15;

/** Energy units the readers accept; the four of the API first. */
export const ENERGY_UNITS = ["hartree", "kcal/mol", "kJ/mol", "eV", "meV", "cm-1", "K"] as const;
export type EnergyUnit = (typeof ENERGY_UNITS)[number];

const KJ_PER_MOL: Record<EnergyUnit, number> = {
  hartree: (HARTREE_J * PARTICLES_PER_MOL) / 1000,
  "kcal/mol": JOULE_PER_CALORIE,
  "kJ/mol": 1,
  eV: (ELEMENTARY_CHARGE_C * PARTICLES_PER_MOL) / 1000,
  meV: (ELEMENTARY_CHARGE_C * PARTICLES_PER_MOL) / 1e6,
  "cm-1": (PLANCK_J_S * LIGHT_M_S * 100 * PARTICLES_PER_MOL) / 1000,
  K: (BOLTZMANN_J_K * PARTICLES_PER_MOL) / 1000,
};

/** kcal/mol in one `unit`. Subtract absolute energies in their own unit first, then convert the difference once. */
export function kcalPer(unit: EnergyUnit): number {
  return KJ_PER_MOL[unit] / JOULE_PER_CALORIE;
}

/** kJ/mol in one `unit`. */
export function kjPer(unit: EnergyUnit): number {
  return KJ_PER_MOL[unit];
}

/**
 * RT in kcal/mol.
 *
 * @throws RangeError on a temperature that is not finite and above zero
 * @example thermalEnergyKcal(298.15) // 0.592485
 */
export function thermalEnergyKcal(temperatureK: number): number {
  if (!(temperatureK > 0 && Number.isFinite(temperatureK))) {
    throw new RangeError(`A temperature lies above 0 K, found ${temperatureK}.`);
  }
  return GAS_CONSTANT_KCAL * temperatureK;
}

import {
  create,
  createUnitDependencies,
  divideDependencies,
  multiplyDependencies,
  parseDependencies,
  type Unit,
  unitDependencies,
} from "mathjs";
import { columnUnit } from "../../lib/csv/column-unit.ts";
import { BOHR_ANGSTROM, ENERGY_UNITS, kcalPer } from "../../lib/units.ts";

/** An instance of our own: units that chemistry adds never reach anybody else's. */
export const math = create({
  parseDependencies,
  unitDependencies,
  createUnitDependencies,
  multiplyDependencies,
  divideDependencies,
} as Parameters<typeof create>[0]);

/** Energies per mole have a dimension of their own, with the factors of the product's one table. */
const OWN: Record<string, string | undefined> = {
  llkcal: undefined,
  lldebye: undefined,
  llppm: undefined,
  llcharge: undefined,
  llmass: undefined,
  llpercent: undefined,
};
for (const name of Object.keys(OWN)) math.createUnit(name);
math.createUnit("llbohr", `${BOHR_ANGSTROM} angstrom`);
/** Names that no unit of the library has. */
const ENERGY_NAMES = new Map<string, string>(
  ENERGY_UNITS.map((unit, k) => [unit, unit === "kcal/mol" ? "llkcal" : `llenergy${"abcdefgh"[k]}`]),
);
for (const unit of ENERGY_UNITS) {
  if (unit !== "kcal/mol") math.createUnit(ENERGY_NAMES.get(unit) ?? "", `${kcalPer(unit)} llkcal`);
}

const energyName = (unit: string): string => ENERGY_NAMES.get(unit) ?? "";

const NAMES: Record<string, string> = {
  Å: "angstrom",
  nm: "nm",
  pm: "pm",
  bohr: "llbohr",
  "Å²": "angstrom^2",
  "nm²": "nm^2",
  "Å³": "angstrom^3",
  "nm³": "nm^3",
  debye: "lldebye",
  ppm: "llppm",
  Hz: "Hz",
  kHz: "kHz",
  MHz: "MHz",
  "°": "deg",
  rad: "rad",
  mrad: "mrad",
  u: "llmass",
  "g/mol": "llmass",
  K: "K",
  s: "s",
  ns: "ns",
  ps: "ps",
  fs: "fs",
  e: "llcharge",
  "%": "llpercent",
};

/** One of a column's unit; null for a plain number. Undefined where the unit is not known. */
export function unitOfColumn(text: string | null): Unit | null | undefined {
  if (text === null || text === "") return null;
  const known = columnUnit(text);
  if (known === null) return undefined;
  if (known.family === "number") return null;
  // A property written in K is a temperature; energies in K are levels and carry their own name.
  if (known.energy !== null && known.unit !== "K") return math.unit(1, energyName(known.energy));
  if (known.family === "entropy") {
    const kcal = known.unit.startsWith("cal") ? 0.001 : 0.001 / 4.184;
    return math.divide(math.unit(kcal, "llkcal"), math.unit(1, "K")) as Unit;
  }
  const name = NAMES[known.unit];
  return name === undefined ? undefined : math.unit(1, name);
}

/** One of an energy's unit, "K" included. */
export function unitOfEnergy(unit: string): Unit {
  return math.unit(1, energyName(unit));
}

const ENERGY = math.unit(1, "llkcal");

/** True for an energy per mole. */
export function isEnergy(unit: Unit | null): boolean {
  return unit?.equalBase(ENERGY) === true;
}

/** So many of `to` are one of `from`; both of one kind. */
export function factorBetween(from: Unit, to: Unit): number {
  const ratio = math.divide(from, to) as unknown;
  return typeof ratio === "number" ? ratio : Number.NaN;
}

import { columnUnit } from "./csv/column-unit.ts";
import { readHeader } from "./csv/header.ts";
import { ENERGY_UNITS, type EnergyUnit } from "./units.ts";
import type { EnergyKind } from "./views.ts";

/** A column as the page of columns lists it. */
export interface ColumnView {
  id: string;
  name: string;
  kind: "energy" | "property";
  unit: string | null;
  /** Accepted frames with and without a value. */
  count: number;
  missing: number;
  /** From 1 among the levels: hue and marker. */
  ordinal: number;
  energyKind: EnergyKind | null;
  temperature: number | null;
  /** False while an energy is only taken as electronic because nobody said. */
  kindStated: boolean;
  geometryLevel: string | null;
  solvent: string | null;
  rule: string | null;
  quantity: string | null;
  atom: number | null;
  /** Where the numbers come from, in words. */
  origin: string;
  /** The formula, of a computed one. */
  formula: string | null;
  /** By a formula, or measured on the structures. */
  computed: boolean;
  /** A property that only counts frames up. */
  counter: boolean;
  /** Formulas that need it. */
  usedBy: string[];
}

export interface RemovedColumnView {
  id: string;
  name: string;
  removedAt: string;
}

export interface ColumnsView {
  columns: ColumnView[];
  /** Removed within thirty days, the newest first. */
  removed: RemovedColumnView[];
}

/** What a column's numbers come from, in words for people. */
export function originWords(origin: string | null, definition: { type: string } | null): string {
  if (definition?.type === "expression") return "a formula";
  if (definition?.type === "observable") return "measured on the structures";
  if (origin === null) return "not known";
  const [kind = "", ...rest] = origin.split(":");
  const name = rest.join(":");
  switch (kind) {
    case "key":
      return `“${name}” of the comment lines`;
    case "number":
      return `number ${name} of the comment lines`;
    case "field":
      return `the data field “${name}”`;
    case "table":
      return `the table ${name}`;
    case "structures":
      return `the structures of ${name}`;
    default:
      return origin;
  }
}

/** How a kind of energy is called. */
export const ENERGY_KIND_WORDS: Record<EnergyKind, string> = {
  electronic: "electronic",
  "zero-point": "with zero-point energy",
  enthalpy: "enthalpy",
  free: "free energy",
};

/** A column as far as it says whether its numbers can be energies. */
interface MaybeLevel {
  name: string;
  kind: "energy" | "property";
  unit: string | null;
  atom: number | null;
  /** A formula, or measured on the structures. */
  computed: boolean;
}

/**
 * Why the numbers of a column cannot be used as a level, as the rest of a sentence; null where they can.
 *
 * @example whyNoLevel({ name: "dipole", kind: "property", unit: "debye", atom: null, computed: false })
 * // "is in debye, which is no unit of energy."
 */
export function whyNoLevel({ kind, unit, atom, computed }: MaybeLevel): string | null {
  if (kind === "energy") return "is a level already.";
  if (computed) return "is computed; what it is follows from how it is computed.";
  if (atom !== null) return `belongs to atom ${atom}; a level has one energy a frame.`;
  const known = unit === null ? null : columnUnit(unit);
  // The unit of a key may be a letter that is one of energy too: "K".
  if (known !== null && known.energy === null && known.family !== "number") {
    return `is in ${unit}, which is no unit of energy.`;
  }
  return null;
}

/** The unit of energy that a column carries or its name spells; null where neither says one. */
export function proposedEnergyUnit({ name, unit }: Pick<MaybeLevel, "name" | "unit">): EnergyUnit | null {
  const own = unit === null ? null : (columnUnit(unit)?.energy ?? null);
  return own ?? readHeader(name).unit?.energy ?? null;
}

const ENERGY_WORDS = /(^|[^a-z])(energy|energies|enthalpy|e_?tot|escf|[eg]_[a-z0-9]+|[hu]_\d+)([^a-z]|$)/i;

/** Whether a property is probably a level that nobody has called so: its unit or its name speaks of energies. */
export function looksLikeLevel(column: MaybeLevel): boolean {
  if (whyNoLevel(column) !== null) return false;
  const unit = proposedEnergyUnit(column);
  // A temperature and a wavenumber have the same units as some energies.
  if (unit !== null && ENERGY_UNITS.indexOf(unit) < 5) return true;
  return ENERGY_WORDS.test(column.name);
}

/** Columns of one quantity over so many atoms stand in one row of the list. */
const FEWEST_IN_GROUP = 4;

/**
 * Columns as the page lists them: those of a per-atom quantity that came together as one entry, others each as one.
 *
 * @example groupColumns(columns).map((group) => group.length) // [1, 1, 28]
 */
export function groupColumns(columns: readonly ColumnView[]): ColumnView[][] {
  const groups: ColumnView[][] = [];
  const byKey = new Map<string, ColumnView[]>();
  for (const column of columns) {
    const key =
      column.quantity === null || column.atom === null
        ? null
        : JSON.stringify([column.quantity, column.unit, column.rule, column.origin]);
    const group = key === null ? undefined : byKey.get(key);
    if (group) {
      group.push(column);
      continue;
    }
    const made = [column];
    groups.push(made);
    if (key !== null) byKey.set(key, made);
  }
  return groups.flatMap((group) => (group.length < FEWEST_IN_GROUP ? group.map((one) => [one]) : [group]));
}

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

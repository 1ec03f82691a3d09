import type { PropertyValues } from "./property-set.ts";

/** What the loader of the averages hands to the page; values by position in the distinct set. */
export interface AveragesView {
  /** Null where there is no finished sift. */
  siftId: string | null;
  properties: PropertyValues[];
  /** Names of columns that only count frames up: shown, not averaged. */
  counters: string[];
  /** Property columns of the ensemble in all, counters aside; more than the page carries are in the file. */
  total: number;
  /** Energies of the other levels over the conformers: kcal/mol above the lowest that has one; null is missing. */
  levels: { id: string; energies: (number | null)[] }[];
}

/** Numbers that one page carries: beyond, the file has the rest. */
export const MAX_VALUES = 400_000;

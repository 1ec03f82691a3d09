import type { MeasuredProperties, MeasuredRecord } from "./averaging.ts";
import type { PropertyValues } from "./property-set.ts";

/** What people said of averages, with the name of who did (null for guests, or where the person is gone) and when. */
export interface SaidView {
  /** 0 while nobody has said anything. */
  version: number;
  /** Atoms from 1. */
  splits: { parts: number[][]; by: string | null; at: string }[];
  measured: (MeasuredRecord & { by: string | null; at: string })[];
  /** Of properties of the whole molecule; null where nothing is kept. */
  properties: (MeasuredProperties & { by: string | null; at: string }) | null;
}

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
  said: SaidView;
  /** Mass numbers of the atoms, 0 where not said; null where none is. */
  isotopes: number[] | null;
}

/** Numbers that one page carries: beyond, the file has the rest. */
export const MAX_VALUES = 400_000;

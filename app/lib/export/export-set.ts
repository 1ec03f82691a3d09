import type { SiftRecipe } from "../recipe/recipe.ts";
import type { KeptConformer } from "../recipe/result.ts";
import type { EnergyUnit } from "../units.ts";

/** A distinct set with everything that travels with it into files. */
export interface ExportSet {
  readonly ensemble: { readonly id: string; readonly name: string; readonly formula: string };
  /** Atomic numbers; mass numbers and the file's own atom names where there are any. */
  readonly elements: ArrayLike<number>;
  readonly isotopes: ArrayLike<number> | null;
  readonly atomLabels: readonly (string | null)[] | null;
  readonly sources: readonly ExportSource[];
  /** Null for a sift in file order. */
  readonly level: { readonly name: string; readonly unit: EnergyUnit; readonly energyKind: string } | null;
  readonly recipe: SiftRecipe;
  /** K, and what the populations are weighted by; null where there are none. */
  readonly temperature: number;
  readonly weights: "copies" | "degeneracy" | null;
  readonly conformers: readonly ExportConformer[];
  /** In words, where frames were held, released or added since it was made; absent where the set is current. */
  readonly notCurrent?: string;
}

export interface ExportSource {
  readonly name: string;
  readonly sha256: string;
  /** Number of its first frame, and how many it has. */
  readonly firstFrame: number;
  readonly frames: number;
}

export interface ExportConformer extends KeptConformer {
  readonly label: string | null;
  /** As stored, in the unit of the level; null without energies. */
  readonly energy: number | null;
  /** Fraction, 0 to 1; null where there is none. */
  readonly population: number | null;
  /** Which atom of its file (from 0) stands at each place, where the file has another order of atoms. */
  readonly mapping?: readonly number[] | null;
}

/** The mapping as files carry it, atoms from 1. */
export function mappingText(mapping: readonly number[]): string {
  return mapping.map((atom) => atom + 1).join(" ");
}

/** The file that a frame came from; null where no source lists it. */
export function sourceOf(sources: readonly ExportSource[], frame: number): ExportSource | null {
  return sources.find(({ firstFrame, frames }) => frame >= firstFrame && frame < firstFrame + frames) ?? null;
}

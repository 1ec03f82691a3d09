import type { KeptConformer, SiftResult } from "../recipe/result.ts";
import type { DistinctPopulations } from "../thermo/populations.ts";

/** One kept conformer as the tables, charts and the 3D view know it. */
export interface ConformerRow {
  /** Position in the distinct set, from 0: rising energy. */
  index: number;
  /** "c1" is the lowest. */
  name: string;
  frame: number;
  /** kcal/mol; null without energies. */
  relativeEnergy: number | null;
  /** Fraction; null without energies. */
  population: number | null;
  /** Copies or degeneracy, whichever weighs; null without energies. */
  weight: number | null;
  degeneracy: number;
  symmetryNumber: number | null;
  copies: number | null;
  mirrorRmsd: number;
  found: number;
  /** Which search found it how often, in words; null where there was one search. */
  foundIn?: string | null;
  /** Those searches as batches from 1, in order. */
  batches?: readonly number[] | null;
  /** Lies above the window that the reader set. */
  outside: boolean;
  /** An RMSD concerned could only be bounded from above. */
  upperBound: boolean;
}

/**
 * Rows of the distinct set in the order of the sift, named c1, c2, ...
 *
 * @param populations of the same conformers in the same order, or null where there are no energies
 * @param windowKcal a conformer above it is marked outside, "within" meaning at most; null is no window
 */
export function conformerRows(
  kept: readonly KeptConformer[],
  populations: DistinctPopulations | null,
  windowKcal: number | null,
): ConformerRow[] {
  return kept.map((conformer, index) => ({
    index,
    name: conformerName(index),
    frame: conformer.frame,
    relativeEnergy: conformer.relativeEnergy,
    population: populations?.populations[index] ?? null,
    weight: populations?.weights.values[index] ?? null,
    degeneracy: conformer.degeneracy,
    symmetryNumber: conformer.symmetryNumber,
    copies: conformer.copies,
    mirrorRmsd: conformer.mirrorRmsd,
    found: conformer.found,
    foundIn: foundInWords(conformer),
    batches: conformer.foundIn?.map(({ batch }) => batch) ?? null,
    outside:
      windowKcal !== null && conformer.relativeEnergy !== null && conformer.relativeEnergy > windowKcal,
    upperBound: conformer.upperBound === true,
  }));
}

/** "batch 1: 3, batch 2: 1" */
function foundInWords({ foundIn }: KeptConformer): string | null {
  return foundIn?.map(({ batch, found }) => `batch ${batch}: ${found}`).join(", ") ?? null;
}

/** Name of a kept conformer by its position from 0. */
export function conformerName(index: number): string {
  return `c${index + 1}`;
}

/** Rows from the most populated down; without energies in the order of the set. */
export function byPopulation(rows: readonly ConformerRow[]): ConformerRow[] {
  return [...rows].sort((a, b) => (b.population ?? 0) - (a.population ?? 0) || a.index - b.index);
}

/** Conformers above the window and the share of the population that they hold. */
export interface Outside {
  count: number;
  share: number;
}

export function outsideWindow(rows: readonly ConformerRow[]): Outside {
  let count = 0;
  let share = 0;
  for (const row of rows) {
    if (!row.outside) continue;
    count += 1;
    share += row.population ?? 0;
  }
  return { count, share };
}

/** What a frame number stands for in a sift. */
export type FrameRole =
  | { kind: "kept"; index: number; name: string }
  | {
      kind: "repeat";
      index: number;
      name: string;
      repeats: number;
      rmsd: number;
      energyDifference: number | null;
      mirror: boolean;
      upperBound: boolean;
    }
  | { kind: "held"; reason: string }
  | { kind: "outside-window" }
  | { kind: "without-energy" };

/**
 * Says of every frame of the sift what became of it.
 *
 * @returns by frame number; a frame that the sift does not know is absent
 */
export function frameRoles(result: SiftResult): Map<number, FrameRole> {
  const roles = new Map<number, FrameRole>();
  const position = new Map<number, number>();
  for (const [index, conformer] of result.kept.entries()) {
    position.set(conformer.frame, index);
    roles.set(conformer.frame, { kind: "kept", index, name: conformerName(index) });
  }
  for (const frame of result.dropped) {
    const index = position.get(frame.repeats);
    if (index === undefined) continue;
    roles.set(frame.frame, {
      kind: "repeat",
      index,
      name: conformerName(index),
      repeats: frame.repeats,
      rmsd: frame.rmsd,
      energyDifference: frame.energyDifference,
      mirror: frame.mirror === true,
      upperBound: frame.upperBound === true,
    });
  }
  for (const frame of result.held) roles.set(frame.frame, { kind: "held", reason: frame.reason });
  for (const frame of result.outsideWindow) roles.set(frame, { kind: "outside-window" });
  for (const frame of result.withoutEnergy) roles.set(frame, { kind: "without-energy" });
  return roles;
}

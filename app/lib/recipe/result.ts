/** Result of a sift, in the shape of the API. Frames are numbered from 1 in file order. */

export interface KeptConformer {
  frame: number;
  /** kcal/mol above the lowest accepted frame at the level; null without energies. */
  relativeEnergy: number | null;
  /** Mirror factor, 1 or 2. */
  degeneracy: number;
  /** All-atom automorphisms realised by a proper rotation; null where the work bound was met. */
  symmetryNumber: number | null;
  /** degeneracy / symmetryNumber over the smallest such value of the kept set; null where symmetryNumber is. */
  copies: number | null;
  /** Å, RMSD of the conformer to its own mirror image in the recipe's atom set. */
  mirrorRmsd: number;
  /** Number of frames that show this conformer, itself included. */
  found: number;
  /** The same by search, where the ensemble grew by further ones: batches from 1 in order, those that found it. */
  foundIn?: { batch: number; found: number }[];
  /** Present and true where an RMSD concerned could only be bounded from above. */
  upperBound?: boolean;
}

export interface DroppedFrame {
  frame: number;
  /** Frame number of the kept conformer that it repeats. */
  repeats: number;
  /** Å, the smaller of proper and mirror RMSD where images are merged. */
  rmsd: number;
  /** kcal/mol, dropped minus kept, never negative; null without energies. */
  energyDifference: number | null;
  /** True where the mirror image is the nearer one (only where images are merged). */
  mirror?: boolean;
  upperBound?: boolean;
}

export interface SiftResult {
  kept: KeptConformer[];
  dropped: DroppedFrame[];
  held: { frame: number; reason: string }[];
  outsideWindow: number[];
  withoutEnergy: number[];
  pairsExamined: number;
  /** Wall time of preparation and computation, without queueing and loading. */
  seconds: number;
}

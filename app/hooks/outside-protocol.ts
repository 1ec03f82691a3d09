import type { AtomSet } from "~/lib/structure";

/** One structure from outside, and the conformers that it is compared with. */
export interface OutsideQuestion {
  elements: number[];
  bonds: number[];
  /** In the atom order of the ensemble. */
  outside: { positions: Float64Array; atoms: AtomSet };
  atoms: AtomSet;
  /** Packed [conformer][atom][x, y, z]. */
  positions: Float64Array;
}

export interface OutsideAnswer {
  rmsd: Float64Array;
  mirrorRmsd: Float64Array;
  exact: Uint8Array;
}

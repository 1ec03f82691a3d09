import { plural } from "../format.ts";
import type { AtomSet } from "../structure.ts";
import { ATOM_SET_WORDS } from "../workbench/recipe-words.ts";

/** A comparison with one structure from outside, as a report tells of it. */
export interface OutsideMethod {
  name: string;
  /** Of the original file. */
  sha256: string;
  set: AtomSet;
  /** Atoms compared. */
  atoms: number;
  conformers: number;
  /** Mirror images counted. */
  mirror: boolean;
  /** Name of the level at which its energy was compared; null where it was not. */
  strainLevel: string | null;
}

/**
 * One paragraph on how a structure from outside was compared, for the methods of a report.
 *
 * @example outsideMethods({ name: "pose.sdf", sha256: "71d0…", set: "heavy", atoms: 15, conformers: 31, mirror: true, strainLevel: null })
 */
export function outsideMethods(used: OutsideMethod): string {
  const mirror = used.mirror ? "; mirror images counted, as the molecule is achiral" : "";
  const strain =
    used.strainLevel === null
      ? ""
      : ` Its strain is its energy at ${used.strainLevel}, taken as it stands, less that of the lowest accepted frame.`;
  return (
    `The outside structure ${used.name} (SHA-256 ${used.sha256.slice(0, 12)}) was mapped onto the molecule by its bonds and compared with ` +
    `${plural(used.conformers, "conformer")} of the distinct set by the least RMSD of ${plural(used.atoms, "atom")} ` +
    `(${ATOM_SET_WORDS[used.set]}) over exchanges of equivalent atoms and proper rotations${mirror}.${strain} ` +
    "It takes no part in populations, averages or coverage."
  );
}

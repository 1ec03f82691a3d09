import { makeGraph } from "../structure.ts";
import { ConformerDistances, type Distance, type DistanceSettings, laidOver } from "./distances.ts";

/** A structure ready to be drawn over another one. */
export interface LaidOver {
  /** Packed x, y, z in Å, atom by atom as those of the other, reflected where the mirror image is the nearer one. */
  positions: Float64Array;
  distance: Distance;
}

/**
 * The second structure in the atom order, and the hand, in which it is nearest to the first.
 *
 * @param molecule atomic numbers, and bonds as flat pairs from 0
 * @param settings how the sift compares; without `mirror` nothing is ever reflected
 * @example layOver(ensemble, { atoms: "heavy", symmetry: true, mirror: true }, a, b).distance.mirror
 */
export function layOver(
  molecule: { elements: readonly number[]; bonds: readonly number[] },
  settings: DistanceSettings,
  first: Float64Array,
  second: Float64Array,
): LaidOver {
  const graph = makeGraph(Uint8Array.from(molecule.elements), molecule.bonds);
  const distances = new ConformerDistances(graph, settings);
  distances.add(first);
  distances.add(second);
  const { distance, permutation } = distances.exchange(0, 1);
  return { positions: laidOver(second, permutation, distance.mirror), distance };
}

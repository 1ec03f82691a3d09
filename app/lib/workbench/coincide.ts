import type { Graph } from "../structure.ts";
import { ConformerDistances } from "./distances.ts";

/** Å. Structures nearer than this, half the radius of a drawn bond, hide each other. */
export const SEEN_AS_ONE = 0.05;

/**
 * Which of the structures drawn in atom colours cannot be told from the first one, since their heavy atoms lie where
 * those of the first do once laid over it.
 *
 * @param drawn in the order in which they were chosen, as they are drawn: atoms exchanged, reflected where the view does so
 * @returns those after the first that lie within `SEEN_AS_ONE`, with the RMSD in Å
 */
export function coinciding(
  graph: Graph,
  drawn: readonly { name: string; positions: Float64Array }[],
): { name: string; rmsd: number }[] {
  if (drawn.length < 2) return [];
  const distances = new ConformerDistances(graph, { atoms: "heavy", symmetry: false, mirror: false });
  for (const { positions } of drawn) distances.add(positions);
  return drawn.flatMap(({ name }, k) => {
    const rmsd = k === 0 ? Number.POSITIVE_INFINITY : distances.between(0, k).rmsd;
    return rmsd <= SEEN_AS_ONE ? [{ name, rmsd }] : [];
  });
}

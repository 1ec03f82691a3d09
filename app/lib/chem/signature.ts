import type { Graph } from "../structure.ts";
import { matchParts } from "./matching.ts";
import { Refiner } from "./refine.ts";

/**
 * Colour refinement of a graph by element, isotope and bonds (Weisfeiler, Leman 1968): atoms of different colour are
 * never equivalent; of equal colour nearly always.
 *
 * @param initial further colour per atom to begin with
 * @returns colours 0..k-1, numbered in an order that does not depend on the order of atoms
 * @example refineColours(ethane) // two carbons one colour, six hydrogens another
 */
export function refineColours(graph: Graph, initial?: ArrayLike<number>): Int32Array {
  const refiner = new Refiner([{ graph, ...(initial && { colours: initial }) }]);
  const colours = refiner.initial();
  refiner.refine(colours);
  return colours;
}

/**
 * A text that is equal for equal molecules whatever the order of their atoms: numbers of atoms and bonds, and a hash of
 * the refined colours. Different molecules may share it (decalin and bicyclopentyl do): `isomorphism` decides.
 *
 * @example graphSignature(water) === graphSignature(waterInAnotherOrder) // true
 */
export function graphSignature(graph: Graph): string {
  const kinds = new Map<number, number>();
  for (let a = 0; a < graph.elements.length; a++) {
    const kind = graph.elements[a]! * 512 + graph.isotopes[a]!;
    kinds.set(kind, (kinds.get(kind) ?? 0) + 1);
  }
  const refiner = new Refiner([{ graph }]);
  refiner.refine(refiner.initial());
  const elements = [...kinds]
    .sort(([x], [y]) => x - y)
    .map(([kind, count]) => `${kind.toString(36)}x${count}`)
    .join(".");
  const hash = refiner.trace.map((half) => (half >>> 0).toString(16).padStart(8, "0")).join("");
  return `${graph.elements.length}-${graph.bonds.length / 2}-${elements}-${hash}`;
}

/**
 * A mapping of one molecule's atoms onto another's that keeps elements, isotopes and bonds; exact.
 *
 * @param options.colours further colour per atom of `a` and of `b` that the mapping has to keep
 * @returns the atom of `b` for every atom of `a`, or null when they are not the same graph (or, for graphs unlike any
 *   molecule, when about two seconds did not settle it)
 * @example isomorphism(ethanol, ethanolInAnotherOrder) // Int32Array of 9 atoms
 */
export function isomorphism(
  a: Graph,
  b: Graph,
  options: { colours?: readonly [ArrayLike<number>, ArrayLike<number>] } = {},
): Int32Array | null {
  const [colourA, colourB] = options.colours ?? [];
  const found = matchParts(
    { graph: a, ...(colourA && { colours: colourA }) },
    { graph: b, ...(colourB && { colours: colourB }) },
  );
  return found === "undecided" ? null : found;
}

/**
 * The molecule as the core sees it: atoms 0..n-1 with elements, an undirected bonded graph in compressed rows,
 * and packed coordinates. Everything a person sees counts from 1; everything here from 0.
 */

/** Atomic number per atom; 0 is a dummy or ghost atom (kept, left out of bonds, RMSD and masses). */
export type Elements = Uint8Array;

/** Bonded graph. Bonds are pairs i < j, sorted by i then j, flat: [i0, j0, i1, j1, ...]. */
export interface Graph {
  readonly elements: Elements;
  /** Mass number per atom where the file gives an isotope, else 0; part of the colour in every comparison. */
  readonly isotopes: Uint16Array;
  readonly bonds: Int32Array;
  /** Row starts into `neighbours`, length atoms + 1. */
  readonly offsets: Int32Array;
  /** Neighbours of every atom, ascending within a row. */
  readonly neighbours: Int32Array;
}

/** Coordinates of frames of one molecule in Å, packed [frame][atom][x, y, z]; flat so that kernels run without allocation. */
export interface FrameBlock {
  readonly atoms: number;
  readonly count: number;
  readonly positions: Float64Array;
}

/** Which atoms a comparison looks at: all but H; those plus H on N, O, S, P; every atom. */
export type AtomSet = "heavy" | "heavy+polarH" | "all";

/**
 * Builds the compressed rows of a bonded graph.
 *
 * @param bonds flat pairs in any order; doubles are merged
 * @throws RangeError on an atom index outside 0..atoms-1 or a bond from an atom to itself
 * @example makeGraph(Uint8Array.of(8, 1, 1), [0, 1, 0, 2]).neighbours // 1 2 0 0
 */
export function makeGraph(elements: Elements, bonds: ArrayLike<number>, isotopes?: Uint16Array): Graph {
  const atoms = elements.length;
  const keys = new Set<number>();
  for (let k = 0; k + 1 < bonds.length; k += 2) {
    const a = bonds[k]!;
    const b = bonds[k + 1]!;
    if (a === b || a < 0 || b < 0 || a >= atoms || b >= atoms) {
      throw new RangeError(`No bond can join atoms ${a} and ${b} of ${atoms}.`);
    }
    keys.add(Math.min(a, b) * atoms + Math.max(a, b));
  }
  const sorted = [...keys].sort((x, y) => x - y);
  const flat = new Int32Array(sorted.length * 2);
  const offsets = new Int32Array(atoms + 1);
  sorted.forEach((key, k) => {
    const i = Math.floor(key / atoms);
    const j = key % atoms;
    flat[2 * k] = i;
    flat[2 * k + 1] = j;
    offsets[i + 1]! += 1;
    offsets[j + 1]! += 1;
  });
  for (let a = 0; a < atoms; a++) offsets[a + 1]! += offsets[a]!;
  const next = offsets.slice(0, atoms);
  const neighbours = new Int32Array(flat.length);
  // Bonds are walked in ascending order twice, so that each row comes out ascending without a sort:
  // first the smaller partners of every atom, then the larger ones.
  for (let k = 0; k < flat.length; k += 2) neighbours[next[flat[k + 1]!]!++] = flat[k]!;
  for (let k = 0; k < flat.length; k += 2) neighbours[next[flat[k]!]!++] = flat[k + 1]!;
  return { elements, isotopes: isotopes ?? new Uint16Array(atoms), bonds: flat, offsets, neighbours };
}

/** The atoms of a set, ascending; dummies never belong. An empty heavy set (H2) falls back to all atoms. */
export function selectAtoms(graph: Graph, set: AtomSet): Int32Array {
  const chosen: number[] = [];
  for (let a = 0; a < graph.elements.length; a++) {
    const z = graph.elements[a]!;
    if (z === 0) continue;
    if (z !== 1 || set === "all" || (set === "heavy+polarH" && isPolarHydrogen(graph, a))) chosen.push(a);
  }
  if (chosen.length === 0 && set !== "all") return selectAtoms(graph, "all");
  return Int32Array.from(chosen);
}

/** Hydrogen bonded to N, O, P or S. */
export function isPolarHydrogen(graph: Graph, atom: number): boolean {
  if (graph.elements[atom] !== 1) return false;
  for (let k = graph.offsets[atom]!; k < graph.offsets[atom + 1]!; k++) {
    const z = graph.elements[graph.neighbours[k]!]!;
    if (z === 7 || z === 8 || z === 15 || z === 16) return true;
  }
  return false;
}

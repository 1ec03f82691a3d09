import { automorphismChain, orbitsOf, type StabiliserChain } from "../chem/automorphisms.ts";
import { type AtomSet, type Graph, selectAtoms } from "../structure.ts";

/**
 * What a comparison needs to know of the molecule, worked out once: the atoms compared, the exchanges among them
 * level by level, and the cells (sets of atoms that the exchanges still open can carry into each other). All in
 * local numbers 0..n-1 of the compared atoms and in flat arrays, because the search runs over it millions of times.
 */

/** What fixing one more base point changes. */
export interface PlanLevel {
  /** Number of images of the base point: children of a node at this depth. */
  readonly images: number;
  /** images x n: local permutations, the first the identity. */
  readonly permutations: Int32Array;
  /** All cells that are open before. */
  readonly open: Int32Array;
  /** Cells that fall apart here ... */
  readonly removed: Int32Array;
  /** ... into single atoms and ... */
  readonly singles: Int32Array;
  /** ... smaller cells. */
  readonly added: Int32Array;
}

export interface SymmetryPlan {
  /** Atoms of the molecule that are compared, ascending. */
  readonly atoms: Int32Array;
  readonly n: number;
  readonly chain: StabiliserChain;
  /** Cell c holds the local atoms cellAtoms[cellStarts[c]] .. cellAtoms[cellStarts[c + 1] - 1], two or more. */
  readonly cellStarts: Int32Array;
  readonly cellAtoms: Int32Array;
  /** Local atoms that no exchange moves, and the cells before anything is fixed. */
  readonly rootSingles: Int32Array;
  readonly rootCells: Int32Array;
  readonly levels: readonly PlanLevel[];
  /** Numbers one shape takes: see `writeShape`. */
  readonly shapeLength: number;
}

/**
 * Prepares comparisons over a set of atoms.
 *
 * @param atoms a named set, or atoms of one's own (ascending; exchanges then keep that choice as a whole)
 * @param options.symmetry false compares by index only
 * @param options.workLimit of the search for exchanges, see `automorphismChain`
 * @example makePlan(graph, "heavy+polarH")
 */
export function makePlan(
  graph: Graph,
  atoms: AtomSet | Int32Array,
  options: { symmetry?: boolean; workLimit?: number } = {},
): SymmetryPlan {
  const chosen = typeof atoms === "string" ? selectAtoms(graph, atoms) : atoms;
  const n = chosen.length;
  const degree = graph.elements.length;
  const local = new Int32Array(degree).fill(-1);
  chosen.forEach((a, k) => {
    local[a] = k;
  });
  const chain = restrictedChain(graph, atoms, chosen, options);
  const { cells, roots, levels } = layOut(chain, chosen, local);
  const cellStarts = new Int32Array(cells.length + 1);
  cells.forEach((cell, c) => {
    cellStarts[c + 1] = cellStarts[c]! + cell.length;
  });
  return {
    atoms: chosen,
    n,
    chain,
    cellStarts,
    cellAtoms: Int32Array.from(cells.flat()),
    rootSingles: Int32Array.from(roots.singles),
    rootCells: Int32Array.from(roots.added),
    levels,
    shapeLength: 4 * n + 1 + 4 * cells.length,
  };
}

function restrictedChain(
  graph: Graph,
  atoms: AtomSet | Int32Array,
  chosen: Int32Array,
  options: { symmetry?: boolean; workLimit?: number },
): StabiliserChain {
  const degree = graph.elements.length;
  if (options.symmetry === false) return { degree, order: 1, complete: true, levels: [] };
  const limit = options.workLimit === undefined ? {} : { workLimit: options.workLimit };
  if (typeof atoms === "string") return automorphismChain(graph, { subset: chosen, ...limit });
  const colours = new Int32Array(degree);
  for (const a of chosen) colours[a] = 1;
  return automorphismChain(graph, { subset: chosen, colours, ...limit });
}

interface Parts {
  singles: number[];
  /** Numbers of cells. */
  added: number[];
}

/** The cells of all depths: a tree of sets, each listed once. */
function layOut(chain: StabiliserChain, chosen: Int32Array, local: Int32Array) {
  const n = chosen.length;
  const cells: number[][] = [];
  let classes = classesAt(chain, 0, chosen);
  const roots = partsOf(
    Array.from({ length: n }, (_, k) => k),
    classes,
    cells,
  );
  let open = roots.added;
  const levels: PlanLevel[] = chain.levels.map((level, i) => {
    classes = classesAt(chain, i + 1, chosen);
    const removed = open.filter((c) => cells[c]!.some((k) => classes[k] !== classes[cells[c]![0]!]));
    const parts = partsOf(
      removed.flatMap((c) => cells[c]!),
      classes,
      cells,
    );
    const before = Int32Array.from(open);
    open = [...open.filter((c) => !removed.includes(c)), ...parts.added];
    const permutations = new Int32Array(level.transversal.length * n);
    level.transversal.forEach((u, k) => {
      for (let p = 0; p < n; p++) permutations[k * n + p] = local[u[chosen[p]!]!]!;
    });
    return {
      images: level.transversal.length,
      permutations,
      open: before,
      removed: Int32Array.from(removed),
      singles: Int32Array.from(parts.singles),
      added: Int32Array.from(parts.added),
    };
  });
  return { cells, roots, levels };
}

/** Class of each local atom under the exchanges that keep the first `depth` base points. */
function classesAt(chain: StabiliserChain, depth: number, chosen: Int32Array): Int32Array {
  const orbits = orbitsOf(chain, depth);
  return Int32Array.from(chosen, (a) => orbits[a]!);
}

function partsOf(atoms: readonly number[], classes: Int32Array, cells: number[][]): Parts {
  const members = new Map<number, number[]>();
  for (const k of atoms) {
    const list = members.get(classes[k]!);
    if (list) list.push(k);
    else members.set(classes[k]!, [k]);
  }
  const parts: Parts = { singles: [], added: [] };
  for (const list of members.values()) {
    if (list.length === 1) parts.singles.push(list[0]!);
    else parts.added.push(cells.push(list.sort((a, b) => a - b)) - 1);
  }
  parts.singles.sort((a, b) => a - b);
  return parts;
}

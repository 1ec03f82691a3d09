import { automorphismChain, orbitsOf, type StabiliserChain } from "../chem/automorphisms.ts";
import { type AtomSet, type Graph, selectAtoms } from "../structure.ts";
import { centreInto } from "./kernel.ts";

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

/**
 * Writes what comparisons read of one frame, `plan.shapeLength` numbers: centred coordinates (3 n); E, their sum of
 * squares; distances from the centroid, ascending within each root cell (n); for each cell the sum of its positions
 * and the norm of their deviations from its own centre (4 each).
 *
 * @param positions packed coordinates of all atoms in Å; `from` is where the frame begins
 */
export function writeShape(
  plan: SymmetryPlan,
  positions: Float64Array,
  from: number,
  shape: Float64Array,
  at: number,
): void {
  const n = plan.n;
  if (n === 0) {
    shape[at] = 0;
    return;
  }
  shape[at + 3 * n] = centreInto(positions, from, plan.atoms, shape, at);
  writeDistances(plan, shape, at);
  const cells = plan.cellStarts.length - 1;
  for (let c = 0; c < cells; c++) writeCell(plan, c, shape, at);
}

function writeDistances(plan: SymmetryPlan, shape: Float64Array, at: number): void {
  let next = at + 3 * plan.n + 1;
  for (const k of plan.rootSingles) shape[next++] = Math.sqrt(squareOf(shape, at + 3 * k));
  for (const c of plan.rootCells) {
    const first = next;
    for (let j = plan.cellStarts[c]!; j < plan.cellStarts[c + 1]!; j++) {
      shape[next++] = Math.sqrt(squareOf(shape, at + 3 * plan.cellAtoms[j]!));
    }
    shape.subarray(first, next).sort();
  }
}

function squareOf(shape: Float64Array, i: number): number {
  return shape[i]! * shape[i]! + shape[i + 1]! * shape[i + 1]! + shape[i + 2]! * shape[i + 2]!;
}

function writeCell(plan: SymmetryPlan, c: number, shape: Float64Array, at: number): void {
  const from = plan.cellStarts[c]!;
  const to = plan.cellStarts[c + 1]!;
  let sx = 0;
  let sy = 0;
  let sz = 0;
  for (let j = from; j < to; j++) {
    const i = at + 3 * plan.cellAtoms[j]!;
    sx += shape[i]!;
    sy += shape[i + 1]!;
    sz += shape[i + 2]!;
  }
  const count = to - from;
  let deviation = 0;
  for (let j = from; j < to; j++) {
    const i = at + 3 * plan.cellAtoms[j]!;
    const dx = shape[i]! - sx / count;
    const dy = shape[i + 1]! - sy / count;
    const dz = shape[i + 2]! - sz / count;
    deviation += dx * dx + dy * dy + dz * dz;
  }
  const t = at + 4 * plan.n + 1 + 4 * c;
  shape[t] = sx;
  shape[t + 1] = sy;
  shape[t + 2] = sz;
  shape[t + 3] = Math.sqrt(deviation);
}

/**
 * True when the distances from the centroid alone put the RMSD of two shapes above the tolerance, whatever the
 * rotation, reflection and exchange: n RMSD^2 >= sum (d_x - d_y)^2 with distances sorted inside every orbit.
 */
export function distancesExceed(
  plan: SymmetryPlan,
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  tolerance: number,
): boolean {
  const n = plan.n;
  return differ(x, xo + 3 * n + 1, y, yo + 3 * n + 1, n, squareLimit(n, tolerance));
}

/** Numbers of a profile: the norm of a shape and its sorted distances, packed for long runs of comparisons. */
export function profileLength(plan: SymmetryPlan): number {
  return plan.n + 1;
}

/** Copies the profile of a shape to `profile` at `to`. */
export function writeProfile(
  plan: SymmetryPlan,
  shape: Float64Array,
  at: number,
  profile: Float64Array,
  to: number,
): void {
  const n = plan.n;
  profile[to] = Math.sqrt(shape[at + 3 * n]!);
  for (let k = 1; k <= n; k++) profile[to + k] = shape[at + 3 * n + k]!;
}

/**
 * `distancesExceed` on profiles, after the cheaper bound sqrt(n) RMSD >= | |x| - |y| |.
 *
 * @param limit from `squareLimit`
 */
export function profilesExceed(
  n: number,
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  limit: number,
): boolean {
  const d = x[xo]! - y[yo]!;
  return d * d > limit || differ(x, xo + 1, y, yo + 1, n, limit);
}

/** n tolerance^2, raised so that rounding never rejects a pair that lies within. */
export function squareLimit(n: number, tolerance: number): number {
  return n * tolerance * tolerance * (1 + 1e-9) + 1e-18;
}

function differ(x: Float64Array, i: number, y: Float64Array, j: number, n: number, limit: number): boolean {
  let sum = 0;
  for (let k = 0; k < n; k++) {
    const d = x[i + k]! - y[j + k]!;
    sum += d * d;
    if (sum > limit) return true;
  }
  return false;
}

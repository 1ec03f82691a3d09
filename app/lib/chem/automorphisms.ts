import type { Graph } from "../structure.ts";
import { AutomorphismSearch, cellOf, copyOf, initialPartition, type Partition } from "./partition-search.ts";

/**
 * The exchanges of equivalent atoms: the automorphism group of the bonded graph, coloured by element and isotope
 * (never by bond order or charge), as a stabiliser chain. Nothing is enumerated: the group of neopentane with its
 * 31,104 members is nine orbits. Method: equitable colour refinement with individualisation (McKay, Congr. Numer.
 * 1981, 30, 45; Weisfeiler, Leman 1968) and one search a point of an orbit, in which left and right side are refined
 * in step.
 */

/** One step of the chain: the orbit of `base` under the exchanges that keep all earlier base points in place. */
export interface ChainLevel {
  readonly base: number;
  /** Atoms that `base` can be moved to; `base` itself first, then ascending. */
  readonly orbit: Int32Array;
  /** transversal[k] moves `base` to orbit[k] and keeps earlier base points; p[atom] = image. The first is the identity. */
  readonly transversal: readonly Int32Array[];
}

/** Every automorphism is one product u1 u2 ... uk with ui from the transversal of level i, uk applied first. */
export interface StabiliserChain {
  /** Atoms of the graph. */
  readonly degree: number;
  /** Number of automorphisms (distinct on the subset), the product of the orbit sizes; may pass 2^53 or be Infinity. */
  readonly order: number;
  /** False when the work limit was met: what is listed are automorphisms, but not all. */
  readonly complete: boolean;
  readonly levels: readonly ChainLevel[];
}

export interface ChainOptions {
  /**
   * Base points come from these atoms only, until they are fixed one by one: the chain then runs over the distinct
   * restrictions to them. Must be a union of orbits, as the atom sets of the product are (else give `colours`).
   */
  subset?: Int32Array;
  /** Further colour per atom that exchanges have to keep. */
  colours?: Int32Array;
  /** Bonds looked at plus table entries written, 60 million by default (about a second). */
  workLimit?: number;
}

const DEFAULT_WORK_LIMIT = 60e6;
/** Entries of all stored permutations together: 16 million are 64 MB. */
const TABLE_LIMIT = 16e6;

/**
 * Stabiliser chain of the automorphism group, skeleton first and local groups (hydrogens of a methyl group) last.
 *
 * @param graph atoms and bonds; may be disconnected
 * @throws RangeError when `colours` has another length than the graph has atoms
 * @example automorphismChain(makeGraph(Uint8Array.of(6, 1, 1, 1, 1), [0, 1, 0, 2, 0, 3, 0, 4])).order // 24
 */
export function automorphismChain(graph: Graph, options: ChainOptions = {}): StabiliserChain {
  const degree = graph.elements.length;
  if (options.colours && options.colours.length !== degree) {
    throw new RangeError(`${options.colours.length} colours for ${degree} atoms.`);
  }
  const search = new AutomorphismSearch(graph, options.workLimit ?? DEFAULT_WORK_LIMIT);
  const path = basePath(graph, search, options);
  return buildChain(degree, search, path);
}

/**
 * Classes of atoms that the exchanges of a chain carry into each other, as the smallest atom of each class.
 *
 * @param fromLevel only exchanges that keep the base points of the first `fromLevel` levels
 * @example orbitsOf(automorphismChain(methane)) // 0 1 1 1 1
 */
export function orbitsOf(chain: StabiliserChain, fromLevel = 0): Int32Array {
  const classes = new DisjointSets(chain.degree);
  for (let i = fromLevel; i < chain.levels.length; i++) {
    for (const permutation of chain.levels[i]!.transversal) classes.joinBy(permutation);
  }
  return Int32Array.from({ length: chain.degree }, (_, a) => classes.find(a));
}

// --- base points ------------------------------------------------------------------------------

interface BasePath {
  bases: number[];
  /** partitions[i]: equitable, with the first i base points singled out. */
  partitions: Partition[];
  /** traces[i] of the refinement that led to partitions[i]. */
  traces: number[];
}

function basePath(graph: Graph, search: AutomorphismSearch, options: ChainOptions): BasePath {
  const degree = graph.elements.length;
  const subset = options.subset ?? Int32Array.from({ length: degree }, (_, a) => a);
  const layers = peelLayers(graph);
  const first = initialPartition(graph, options.colours);
  search.refineAll(first);
  const path: BasePath = { bases: [], partitions: [first], traces: [0] };
  for (;;) {
    const last = path.partitions[path.partitions.length - 1]!;
    const base = nextBase(graph, last, subset, layers);
    if (base < 0) return path;
    const next = copyOf(last);
    path.traces.push(search.singleOut(next, base));
    path.bases.push(base);
    path.partitions.push(next);
  }
}

/**
 * The next base point: innermost first (rings and what joins them, then chains from the middle outwards, then end
 * atoms), of equal ones in the smallest class, then the heavier element. A search that fixes the images of base
 * points in this order knows the rotation before it comes to local groups.
 */
function nextBase(graph: Graph, p: Partition, subset: Int32Array, layers: Int32Array): number {
  let best = -1;
  for (const a of subset) {
    const size = p.size[p.start[a]!]!;
    if (size < 2) continue;
    if (best < 0) {
      best = a;
      continue;
    }
    const bySize = p.size[p.start[best]!]! - size;
    const byElement = graph.elements[a]! - graph.elements[best]!;
    if ((layers[a]! - layers[best]! || bySize || byElement || best - a) > 0) best = a;
  }
  return best;
}

/** Round in which an atom falls when end atoms are taken off again and again; rings and what joins them never fall. */
function peelLayers(graph: Graph): Int32Array {
  const n = graph.elements.length;
  const left = new Int32Array(n);
  const layers = new Int32Array(n).fill(n + 1);
  let front: number[] = [];
  for (let a = 0; a < n; a++) {
    left[a] = graph.offsets[a + 1]! - graph.offsets[a]!;
    if (left[a]! <= 1) front.push(a);
  }
  for (let round = 1; front.length > 0; round++) {
    const next: number[] = [];
    for (const a of front) layers[a] = round;
    for (const a of front) {
      for (let k = graph.offsets[a]!; k < graph.offsets[a + 1]!; k++) {
        const b = graph.neighbours[k]!;
        if (layers[b] === n + 1 && --left[b]! === 1) next.push(b);
      }
    }
    front = next;
  }
  return layers;
}

// --- the chain --------------------------------------------------------------------------------

function buildChain(degree: number, search: AutomorphismSearch, path: BasePath): StabiliserChain {
  const classes = new DisjointSets(degree);
  const levels: ChainLevel[] = [];
  let complete = true;
  let entries = 0;
  // From the last base point to the first: what is known of a stabiliser then spares failing searches above it.
  for (let i = path.bases.length - 1; i >= 0 && complete; i--) {
    const base = path.bases[i]!;
    const before = path.partitions[i]!;
    const images = cellOf(before, base).sort();
    const orbit = [base];
    const transversal: Int32Array[] = [Int32Array.from({ length: degree }, (_, a) => a)];
    const refused = new Set<number>();
    for (const image of images) {
      if (image === base || refused.has(classes.find(image))) continue;
      const found = search.find(before, path.partitions[i + 1]!, path.traces[i + 1]!, image);
      if (search.exhausted || entries > TABLE_LIMIT) {
        complete = false;
        break;
      }
      if (found) {
        orbit.push(image);
        transversal.push(found);
        entries += degree;
        classes.joinBy(found);
      } else {
        refused.add(classes.find(image));
      }
    }
    if (orbit.length > 1) levels.unshift({ base, orbit: Int32Array.from(orbit), transversal });
  }
  const order = levels.reduce((product, level) => product * level.orbit.length, 1);
  return { degree, order, complete: complete && !search.exhausted, levels };
}

class DisjointSets {
  private readonly parent: Int32Array;

  constructor(size: number) {
    this.parent = Int32Array.from({ length: size }, (_, a) => a);
  }

  find(a: number): number {
    let root = a;
    while (this.parent[root] !== root) root = this.parent[root]!;
    while (this.parent[a] !== root) {
      const next = this.parent[a]!;
      this.parent[a] = root;
      a = next;
    }
    return root;
  }

  joinBy(permutation: Int32Array): void {
    for (let a = 0; a < permutation.length; a++) {
      const one = this.find(a);
      const other = this.find(permutation[a]!);
      if (one !== other) this.parent[Math.max(one, other)] = Math.min(one, other);
    }
  }
}

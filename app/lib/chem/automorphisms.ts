import type { Graph } from "../structure.ts";

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

// --- ordered partitions -----------------------------------------------------------------------

/** Atoms in an ordered list of classes; a class is named by the place where it starts. */
interface Partition {
  /** Atom at each place. */
  readonly order: Int32Array;
  /** Place of each atom. */
  readonly place: Int32Array;
  /** Start of the class of each atom. */
  readonly start: Int32Array;
  /** Size of the class that starts at a place; meaningless elsewhere. */
  readonly size: Int32Array;
}

function copyOf(p: Partition): Partition {
  return { order: p.order.slice(), place: p.place.slice(), start: p.start.slice(), size: p.size.slice() };
}

function copyInto(from: Partition, to: Partition): void {
  to.order.set(from.order);
  to.place.set(from.place);
  to.start.set(from.start);
  to.size.set(from.size);
}

function cellOf(p: Partition, atom: number): Int32Array {
  const start = p.start[atom]!;
  return p.order.slice(start, start + p.size[start]!);
}

function initialPartition(graph: Graph, colours: Int32Array | undefined): Partition {
  const n = graph.elements.length;
  const compare = (a: number, b: number) =>
    graph.elements[a]! - graph.elements[b]! ||
    graph.isotopes[a]! - graph.isotopes[b]! ||
    (colours ? colours[a]! - colours[b]! : 0);
  const sorted = Array.from({ length: n }, (_, a) => a).sort((a, b) => compare(a, b) || a - b);
  const p: Partition = {
    order: Int32Array.from(sorted),
    place: new Int32Array(n),
    start: new Int32Array(n),
    size: new Int32Array(n),
  };
  let start = 0;
  for (let k = 0; k < n; k++) {
    if (k > 0 && compare(sorted[k - 1]!, sorted[k]!) !== 0) start = k;
    p.place[sorted[k]!] = k;
    p.start[sorted[k]!] = start;
    p.size[start]! += 1;
  }
  return p;
}

/** Refinement and search share scratch arrays, so that neither allocates in its loops. */
class AutomorphismSearch {
  exhausted = false;
  private work = 0;
  private readonly n: number;
  private readonly counts: Int32Array;
  private readonly hits: Int32Array;
  private readonly touched: Int32Array;
  private readonly members: Int32Array;
  private readonly classes: Int32Array;
  private readonly queue: Int32Array;
  private readonly queued: Uint8Array;
  private queueHead = 0;
  private queueLength = 0;
  private readonly lefts: Partition[] = [];
  private readonly rights: Partition[] = [];

  constructor(
    private readonly graph: Graph,
    private readonly limit: number,
  ) {
    const n = graph.elements.length;
    this.n = n;
    this.counts = new Int32Array(n);
    this.hits = new Int32Array(n);
    this.touched = new Int32Array(n);
    this.members = new Int32Array(n);
    this.classes = new Int32Array(n);
    this.queue = new Int32Array(n);
    this.queued = new Uint8Array(n);
  }

  refineAll(p: Partition): number {
    for (let k = 0; k < this.n; k += p.size[k]!) this.push(k);
    return this.refine(p);
  }

  /** Splits `atom` off the front of its class and refines; the number returned is the same for images under automorphisms. */
  singleOut(p: Partition, atom: number): number {
    const start = p.start[atom]!;
    const size = p.size[start]!;
    swapTo(p, atom, start);
    p.size[start] = 1;
    if (size > 1) {
      p.size[start + 1] = size - 1;
      for (let k = start + 1; k < start + size; k++) p.start[p.order[k]!] = start + 1;
    }
    this.push(start);
    return mix(this.refine(p), start * 31 + size);
  }

  private push(start: number): void {
    if (this.queued[start]) return;
    this.queued[start] = 1;
    this.queue[(this.queueHead + this.queueLength) % this.n] = start;
    this.queueLength += 1;
  }

  private refine(p: Partition): number {
    let trace = 17;
    while (this.queueLength > 0) {
      const start = this.queue[this.queueHead]!;
      this.queueHead = (this.queueHead + 1) % this.n;
      this.queueLength -= 1;
      this.queued[start] = 0;
      trace = mix(trace, this.splitBy(p, start));
    }
    return trace;
  }

  /** Splits every class by the number of neighbours in the class at `start`. */
  private splitBy(p: Partition, start: number): number {
    const { offsets, neighbours } = this.graph;
    const size = p.size[start]!;
    for (let k = 0; k < size; k++) this.members[k] = p.order[start + k]!;
    let touchedCount = 0;
    let classCount = 0;
    for (let k = 0; k < size; k++) {
      const atom = this.members[k]!;
      const end = offsets[atom + 1]!;
      this.work += end - offsets[atom]! + 1;
      for (let e = offsets[atom]!; e < end; e++) {
        const other = neighbours[e]!;
        if (this.counts[other]!++ > 0) continue;
        this.touched[touchedCount++] = other;
        const its = p.start[other]!;
        if (this.hits[its] === 0) this.classes[classCount++] = its;
        // Atoms with a neighbour in the splitter gather at the end of their class.
        this.hits[its]! += 1;
        swapTo(p, other, its + p.size[its]! - this.hits[its]!);
      }
    }
    // Places, not labels, decide the order: both sides of a search then go through the same steps.
    const met = this.classes.subarray(0, classCount).sort();
    let trace = mix(start, classCount);
    for (let k = 0; k < classCount; k++) trace = this.splitClass(p, met[k]!, trace);
    for (let k = 0; k < touchedCount; k++) this.counts[this.touched[k]!] = 0;
    if (this.work > this.limit) this.exhausted = true;
    return trace;
  }

  private splitClass(p: Partition, start: number, traceBefore: number): number {
    const size = p.size[start]!;
    const hit = this.hits[start]!;
    const end = start + size;
    this.hits[start] = 0;
    this.sortByCount(p, end - hit, end);
    let trace = mix(traceBefore, start * 8 + size);
    let largest = start;
    let largestSize = hit < size ? size - hit : 0;
    const wasQueued = this.queued[start] === 1;
    let from = hit < size ? end - hit : start;
    if (hit < size) p.size[start] = size - hit;
    const firstPart = from;
    while (from < end) {
      const count = this.counts[p.order[from]!]!;
      let to = from + 1;
      while (to < end && this.counts[p.order[to]!] === count) to++;
      p.size[from] = to - from;
      if (from !== start) for (let k = from; k < to; k++) p.start[p.order[k]!] = from;
      if (to - from > largestSize) {
        largest = from;
        largestSize = to - from;
      }
      trace = mix(mix(trace, from), count);
      from = to;
    }
    if (largestSize === size) return trace;
    // All parts but the largest suffice as splitters, unless the whole still waits in the queue (Hopcroft).
    if (wasQueued) largest = -1;
    if (firstPart !== start && largest !== start) this.push(start);
    for (let k = firstPart; k < end; k += p.size[k]!) if (k !== largest) this.push(k);
    return trace;
  }

  private sortByCount(p: Partition, from: number, to: number): void {
    for (let k = from + 1; k < to; k++) {
      const atom = p.order[k]!;
      const count = this.counts[atom]!;
      let j = k - 1;
      while (j >= from && this.counts[p.order[j]!]! > count) {
        p.order[j + 1] = p.order[j]!;
        p.place[p.order[j]!] = j + 1;
        j--;
      }
      p.order[j + 1] = atom;
      p.place[atom] = j + 1;
    }
  }

  /**
   * An automorphism that maps the partition `left` (a base point singled out of `before`) onto `before` with `image`
   * singled out at the same place; null if there is none or the work limit was met. It moves as few atoms as the
   * search finds.
   */
  find(before: Partition, left: Partition, leftTrace: number, image: number): Int32Array | null {
    const right = this.pool(this.rights, 0);
    copyInto(before, right);
    this.work += this.n;
    if (this.singleOut(right, image) !== leftTrace) return null;
    copyInto(left, this.pool(this.lefts, 0));
    return this.extend(0);
  }

  private extend(depth: number): Int32Array | null {
    const left = this.lefts[depth]!;
    const right = this.rights[depth]!;
    const cell = differingClass(left, right);
    if (cell < 0) return this.mapping(left, right);
    const size = left.size[cell]!;
    // An atom that may stay where it is keeps the permutation sparse.
    let atom = left.order[cell]!;
    for (let k = cell; k < cell + size; k++) {
      if (right.start[left.order[k]!] === cell) {
        atom = left.order[k]!;
        break;
      }
    }
    const nextLeft = this.pool(this.lefts, depth + 1);
    const nextRight = this.pool(this.rights, depth + 1);
    copyInto(left, nextLeft);
    const trace = this.singleOut(nextLeft, atom);
    const stays = right.start[atom] === cell;
    for (let k = stays ? -1 : 0; k < size; k++) {
      const image = k < 0 ? atom : right.order[cell + k]!;
      if (k >= 0 && stays && image === atom) continue;
      if (this.exhausted) return null;
      copyInto(right, nextRight);
      this.work += this.n;
      if (this.singleOut(nextRight, image) !== trace) continue;
      const found = this.extend(depth + 1);
      if (found) return found;
    }
    return null;
  }

  /** Single atoms go to single atoms of the same place; classes that are the same on both sides stay as they are. */
  private mapping(left: Partition, right: Partition): Int32Array | null {
    const { offsets, neighbours, elements, isotopes } = this.graph;
    const p = new Int32Array(this.n);
    for (let k = 0; k < this.n; k += left.size[k]!) {
      if (left.size[k] === 1) p[left.order[k]!] = right.order[k]!;
      else for (let j = k; j < k + left.size[k]!; j++) p[left.order[j]!] = left.order[j]!;
    }
    for (let a = 0; a < this.n; a++) {
      const image = p[a]!;
      if (elements[a] !== elements[image] || isotopes[a] !== isotopes[image]) return null;
      if (offsets[a + 1]! - offsets[a]! !== offsets[image + 1]! - offsets[image]!) return null;
      for (let e = offsets[a]!; e < offsets[a + 1]!; e++) {
        if (!this.bonded(image, p[neighbours[e]!]!)) return null;
      }
    }
    return p;
  }

  private bonded(a: number, b: number): boolean {
    const { offsets, neighbours } = this.graph;
    for (let e = offsets[a]!; e < offsets[a + 1]!; e++) if (neighbours[e] === b) return true;
    return false;
  }

  private pool(list: Partition[], depth: number): Partition {
    let p = list[depth];
    if (!p) {
      const row = () => new Int32Array(this.n);
      p = { order: row(), place: row(), start: row(), size: row() };
      list[depth] = p;
    }
    return p;
  }
}

/** Start of the first class that holds other atoms on the two sides; -1 when all with several atoms agree. */
function differingClass(left: Partition, right: Partition): number {
  const n = left.order.length;
  for (let k = 0; k < n; k += left.size[k]!) {
    const size = left.size[k]!;
    if (size === 1) continue;
    for (let j = k; j < k + size; j++) if (right.start[left.order[j]!] !== k) return k;
  }
  return -1;
}

function swapTo(p: Partition, atom: number, place: number): void {
  const here = p.place[atom]!;
  const other = p.order[place]!;
  p.order[here] = other;
  p.place[other] = here;
  p.order[place] = atom;
  p.place[atom] = place;
}

function mix(hash: number, value: number): number {
  const h = Math.imul(hash ^ value, 0x9e3779b1);
  return (h ^ (h >>> 15)) | 0;
}

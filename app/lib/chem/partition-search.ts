import type { Graph } from "../structure.ts";

/**
 * Ordered partitions of the atoms, their refinement until every class sees every other alike, and the search for one
 * automorphism between two of them.
 */

/** Atoms in an ordered list of classes; a class is named by the place where it starts. */
export interface Partition {
  /** Atom at each place. */
  readonly order: Int32Array;
  /** Place of each atom. */
  readonly place: Int32Array;
  /** Start of the class of each atom. */
  readonly start: Int32Array;
  /** Size of the class that starts at a place; meaningless elsewhere. */
  readonly size: Int32Array;
}

export function copyOf(p: Partition): Partition {
  return { order: p.order.slice(), place: p.place.slice(), start: p.start.slice(), size: p.size.slice() };
}

function copyInto(from: Partition, to: Partition): void {
  to.order.set(from.order);
  to.place.set(from.place);
  to.start.set(from.start);
  to.size.set(from.size);
}

export function cellOf(p: Partition, atom: number): Int32Array {
  const start = p.start[atom]!;
  return p.order.slice(start, start + p.size[start]!);
}

export function initialPartition(graph: Graph, colours: Int32Array | undefined): Partition {
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
export class AutomorphismSearch {
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

import type { Graph } from "../structure.ts";

/**
 * Colour refinement (Weisfeiler, Leman 1968) of one or two graphs at once, with handedness as part of the colour
 * where it can be told. Colours are ranks, so that equal colours in two graphs refined together mean the same.
 */

/** A tetrahedral or pyramidal centre; neighbours ascending. */
export interface Centre {
  readonly kind: "centre";
  readonly atom: number;
  readonly neighbours: readonly number[];
}

/** A double bond i < j with the further neighbours of i and of j, each ascending. */
export interface DoubleBond {
  readonly kind: "double-bond";
  readonly atoms: readonly [number, number];
  readonly sides: readonly [readonly number[], readonly number[]];
}

/** A place whose arrangement in space can be + or -, told by the order of its neighbours. */
export type StereoUnit = Centre | DoubleBond;

/** One graph to be coloured. */
export interface Part {
  graph: Graph;
  /** Further colour per atom. */
  colours?: ArrayLike<number>;
  units?: readonly StereoUnit[];
  /** Of every unit: +1, -1, or 0 when it is not to count. */
  signs?: ArrayLike<number>;
}

/** Sign of the permutation that sorts `values`; 0 when two are equal. */
export function sortingSign(values: readonly number[]): number {
  let sign = 1;
  for (let a = 0; a < values.length; a++) {
    for (let b = a + 1; b < values.length; b++) {
      if (values[a] === values[b]) return 0;
      if (values[a]! > values[b]!) sign = -sign;
    }
  }
  return sign;
}

/**
 * Sign of a unit once its neighbours are named anew (colours, or images under a mapping): what was told by the old
 * order is told by the order of the new names. 0 when two names that have to differ are equal.
 */
export function signInOrder(unit: StereoUnit, sign: number, name: (atom: number) => number): number {
  if (unit.kind === "centre") return sign * sortingSign(unit.neighbours.map(name));
  return sign * sortingSign(unit.sides[0].map(name)) * sortingSign(unit.sides[1].map(name));
}

/** Refines the colours of one part, or of two parts side by side. */
export class Refiner {
  /** Atoms of all parts; those of the second part follow the first. */
  readonly atoms: number;
  /** Where the second part starts; `atoms` when there is one part. */
  readonly split: number;
  /** Rounds times atoms so far, a measure of the work. */
  work = 0;
  /** What the last refinement saw, as a number that does not depend on the order of atoms (two 32-bit halves). */
  trace: readonly [number, number] = [0, 0];

  private readonly parts: readonly Part[];
  private readonly width: number;
  private readonly rows: Int32Array;
  private readonly order: number[];

  constructor(parts: readonly [Part] | readonly [Part, Part]) {
    this.parts = parts;
    this.split = parts[0].graph.elements.length;
    this.atoms = this.split + (parts[1]?.graph.elements.length ?? 0);
    let degree = 0;
    for (const { graph } of parts) {
      for (let a = 0; a < graph.elements.length; a++) {
        degree = Math.max(degree, graph.offsets[a + 1]! - graph.offsets[a]!);
      }
    }
    this.width = degree + 2;
    this.rows = new Int32Array(this.atoms * this.width);
    this.order = Array.from({ length: this.atoms }, (_, a) => a);
  }

  /** Colours by element, isotope and the parts' own colours, not yet refined. */
  initial(): Int32Array {
    const keys: number[] = [];
    for (const { graph, colours } of this.parts) {
      for (let a = 0; a < graph.elements.length; a++) {
        keys.push((colours?.[a] ?? 0) * 65536 + graph.elements[a]! * 512 + graph.isotopes[a]!);
      }
    }
    const ranks = new Map([...new Set(keys)].sort((x, y) => x - y).map((key, rank) => [key, rank]));
    return Int32Array.from(keys, (key) => ranks.get(key) ?? 0);
  }

  /**
   * Refines in place until nothing splits.
   *
   * @returns number of colours; -1 as soon as the two parts differ in how many atoms have a colour
   */
  refine(colours: Int32Array): number {
    let trace: readonly [number, number] = [17, 31];
    let count = -1;
    for (;;) {
      this.fillRows(colours);
      this.order.sort((a, b) => this.compare(a, b));
      this.work += this.atoms;
      const next = this.rank(colours);
      if (next.differ) return -1;
      trace = [fold(trace[0], next.hash), fold(trace[1], next.hash ^ 0x5bd1e995)];
      this.trace = trace;
      if (next.count === count) return count;
      count = next.count;
    }
  }

  private fillRows(colours: Int32Array): void {
    const { rows, width } = this;
    let base = 0;
    for (const { graph } of this.parts) {
      for (let a = 0; a < graph.elements.length; a++) {
        const row = (base + a) * width;
        rows[row] = colours[base + a]!;
        rows[row + 1] = 0;
        let used = row + 2;
        for (let k = graph.offsets[a]!; k < graph.offsets[a + 1]!; k++) {
          const value = colours[base + graph.neighbours[k]!]! + 1;
          let at = used++;
          while (at > row + 2 && rows[at - 1]! > value) {
            rows[at] = rows[at - 1]!;
            at -= 1;
          }
          rows[at] = value;
        }
        rows.fill(0, used, row + width);
      }
      base += graph.elements.length;
    }
    this.addHands(colours);
  }

  /** Second number of a row: the handedness of the atom, where the colours of its neighbours tell it. */
  private addHands(colours: Int32Array): void {
    const { rows, width } = this;
    let base = 0;
    for (const { graph, units, signs } of this.parts) {
      const start = base;
      units?.forEach((unit, u) => {
        const sign = signInOrder(unit, signs?.[u] ?? 0, (a) => colours[start + a]!);
        if (sign === 0) return;
        const code = sign > 0 ? 1 : 2;
        if (unit.kind === "centre") {
          rows[(start + unit.atom) * width + 1]! += code;
        } else {
          // An atom may end two such bonds: the colour of the partner tells them apart.
          const [i, j] = unit.atoms;
          rows[(start + i) * width + 1]! += 4 * code * (colours[start + j]! + 1);
          rows[(start + j) * width + 1]! += 4 * code * (colours[start + i]! + 1);
        }
      });
      base += graph.elements.length;
    }
  }

  private compare(a: number, b: number): number {
    const { rows, width } = this;
    for (let k = 0; k < width; k++) {
      const difference = rows[a * width + k]! - rows[b * width + k]!;
      if (difference !== 0) return difference;
    }
    return 0;
  }

  private rank(colours: Int32Array): { count: number; hash: number; differ: boolean } {
    const { order, split, rows, width } = this;
    const two = split < this.atoms;
    let count = 0;
    let hash = 7;
    for (let from = 0; from < order.length; count++) {
      let to = from;
      let balance = 0;
      while (to < order.length && this.compare(order[from]!, order[to]!) === 0) {
        balance += order[to]! < split ? 1 : -1;
        to += 1;
      }
      if (two && balance !== 0) return { count, hash, differ: true };
      const first = order[from]! * width;
      for (let k = 0; k < width; k++) hash = fold(hash, rows[first + k]!);
      hash = fold(hash, to - from);
      for (let k = from; k < to; k++) colours[order[k]!] = count;
      from = to;
    }
    return { count, hash, differ: false };
  }
}

/** Mixes a number into a 32-bit hash. */
export function fold(hash: number, value: number): number {
  let h = Math.imul(hash ^ value, 0x85ebca6b);
  h ^= h >>> 13;
  h = Math.imul(h, 0xc2b2ae35);
  return h ^ (h >>> 16);
}

import type { Graph } from "../structure.ts";
import { type Part, Refiner, signInOrder } from "./refine.ts";

/** Rounds times atoms after which a search gives up: far beyond what molecules need, a second or two. */
const WORK_LIMIT = 20e6;

export interface MatchOptions {
  workLimit?: number;
  /** Also search over end atoms: needed where the hand of CH2 and CH3 counts, which tells their hydrogens apart. */
  everyAtom?: boolean;
}

/**
 * A mapping of one graph onto another that keeps elements, isotopes, bonds, given colours and the handedness of
 * every stereo unit; exact, by refinement and individualisation (McKay, Congr. Numer. 1981, 30, 45).
 *
 * Hydrogens and other end atoms are not searched over (unless `everyAtom`): those at one atom are interchangeable once
 * that atom is placed.
 *
 * @returns image in `b` of every atom of `a`; null when there is none; "undecided" when the work limit was met
 */
export function matchParts(
  a: Part,
  b: Part,
  { workLimit = WORK_LIMIT, everyAtom = false }: MatchOptions = {},
): Int32Array | null | "undecided" {
  if (a.graph.elements.length !== b.graph.elements.length || a.graph.bonds.length !== b.graph.bonds.length) {
    return null;
  }
  const refiner = new Refiner([a, b]);
  const colours = refiner.initial();
  if (refiner.refine(colours) < 0) return null;
  const free = everyAtom ? new Uint8Array(a.graph.elements.length) : interchangeable(a.graph);
  return new Search(a, b, refiner, workLimit, free).run(colours);
}

class Search {
  constructor(
    private readonly a: Part,
    private readonly b: Part,
    private readonly refiner: Refiner,
    private readonly limit: number,
    /** End atoms that need not be searched over. */
    private readonly free: Uint8Array,
  ) {}

  run(colours: Int32Array): Int32Array | null | "undecided" {
    const cell = this.nextCell(colours);
    if (cell === null) return this.verified(colours);
    const { split, atoms } = this.refiner;
    for (let y = split; y < atoms; y++) {
      if (colours[y] !== cell.colour) continue;
      if (this.refiner.work > this.limit) return "undecided";
      const next = colours.map((c) => 2 * c);
      next[cell.atom]! += 1;
      next[y]! += 1;
      if (this.refiner.refine(next) < 0) continue;
      const found = this.run(next);
      if (found !== null) return found;
    }
    return null;
  }

  /** The smallest class of several atoms that are not all interchangeable. */
  private nextCell(colours: Int32Array): { colour: number; atom: number } | null {
    const sizes = new Map<number, number>();
    for (let x = 0; x < this.refiner.split; x++) {
      if (!this.free[x]) sizes.set(colours[x]!, (sizes.get(colours[x]!) ?? 0) + 1);
    }
    let best: { colour: number; atom: number } | null = null;
    let bestSize = Infinity;
    for (let x = 0; x < this.refiner.split; x++) {
      const size = this.free[x] ? 0 : (sizes.get(colours[x]!) ?? 0);
      if (size < 2 || size >= bestSize) continue;
      best = { colour: colours[x]!, atom: x };
      bestSize = size;
    }
    return best;
  }

  private verified(colours: Int32Array): Int32Array | null {
    const map = this.pairUp(colours);
    if (!map) return null;
    const { a, b } = this;
    const inB = new Set<number>();
    const n = this.refiner.split;
    for (let k = 0; k < b.graph.bonds.length; k += 2) {
      inB.add(b.graph.bonds[k]! * n + b.graph.bonds[k + 1]!);
    }
    for (let k = 0; k < a.graph.bonds.length; k += 2) {
      const i = map[a.graph.bonds[k]!]!;
      const j = map[a.graph.bonds[k + 1]!]!;
      if (!inB.has(Math.min(i, j) * n + Math.max(i, j))) return null;
    }
    return keepsHands(a, b, map) ? map : null;
  }

  /** Atoms alone in their class first; then end atoms, each to one at the image of its neighbour. */
  private pairUp(colours: Int32Array): Int32Array | null {
    const n = this.refiner.split;
    const waiting = new Map<number, number[]>();
    for (let y = 0; y < n; y++) {
      const colour = colours[n + y]!;
      const list = waiting.get(colour);
      if (list) list.push(y);
      else waiting.set(colour, [y]);
    }
    const map = new Int32Array(n).fill(-1);
    for (const wantFree of [0, 1]) {
      for (let x = 0; x < n; x++) {
        if (this.free[x] !== wantFree) continue;
        const list = waiting.get(colours[x]!) ?? [];
        const parent = parentOf(this.a.graph, x);
        const place =
          wantFree && parent >= 0
            ? list.findIndex((y) => parentOf(this.b.graph, y) === map[parent])
            : list.length - 1;
        if (place < 0) return null;
        map[x] = list.splice(place, 1)[0]!;
      }
    }
    return map;
  }
}

/** True when every unit of `a` that counts lies on one of `b`, with the same handedness. */
function keepsHands(a: Part, b: Part, map: Int32Array): boolean {
  const key = (atoms: readonly number[]): string => atoms.join("-");
  const signsOfB = new Map<string, number>();
  b.units?.forEach((unit, u) => {
    signsOfB.set(key(unit.kind === "centre" ? [unit.atom] : unit.atoms), b.signs?.[u] ?? 0);
  });
  return (a.units ?? []).every((unit, u) => {
    const sign = a.signs?.[u] ?? 0;
    if (sign === 0) return true;
    const image = unit.kind === "centre" ? [map[unit.atom]!] : unit.atoms.map((x) => map[x]!);
    const moved = signInOrder(unit, sign, (x) => map[x]!);
    return signsOfB.get(key(image.sort((x, y) => x - y))) === moved;
  });
}

/** Marks end atoms whose neighbour has further ones, and atoms without bonds: equal ones may be paired in any way. */
function interchangeable(graph: Graph): Uint8Array {
  const degree = (x: number): number => graph.offsets[x + 1]! - graph.offsets[x]!;
  return Uint8Array.from(graph.elements, (_, x) => {
    if (degree(x) === 0) return 1;
    return degree(x) === 1 && degree(graph.neighbours[graph.offsets[x]!]!) > 1 ? 1 : 0;
  });
}

function parentOf(graph: Graph, x: number): number {
  const from = graph.offsets[x]!;
  return graph.offsets[x + 1]! - from === 1 ? graph.neighbours[from]! : -1;
}

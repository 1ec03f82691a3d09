import { automorphismChain, type StabiliserChain } from "../../app/lib/chem/automorphisms.ts";
import { BondFinder } from "../../app/lib/chem/bonds.ts";
import type { Graph } from "../../app/lib/structure.ts";
import { mulberry } from "../factories/embed.ts";

/**
 * Large ensembles for the benchmark, made from real geometries by a seeded generator: new minima by turning bonds,
 * copies of them by noise, relabelling of equivalent atoms and rigid motion. Their duplicate rate is a choice.
 */
export interface EnsembleRecipe {
  seed: number;
  frames: number;
  /** Energies at which there is a minimum, and different geometries among them (fewer: equal shapes far apart in energy). */
  minima: number;
  geometries: number;
  /** kcal/mol that the minima spread over. */
  span: number;
  /** Radians by which bonds of a copy are turned, as a standard deviation: long chains stand less. */
  turn: number;
}

export interface MadeFrame {
  positions: Float64Array;
  /** Hartree. */
  energy: number;
}

/** Å a coordinate: two copies of a minimum lie 0.05 Å apart by that alone. */
const NOISE = 0.02;
const KCAL_PER_HARTREE = 627.50947406;
/** Å between atoms that are three or more bonds apart, in a new minimum. */
const APART = 2.0;

export class EnsembleMaker {
  private readonly random: () => number;
  private readonly chain: StabiliserChain;
  private readonly turns: Turn[];
  private readonly finder: BondFinder;
  private readonly far: Int32Array;

  /** @param bases frames of real geometry, packed */
  constructor(
    readonly graph: Graph,
    private readonly bases: readonly Float64Array[],
    private readonly recipe: EnsembleRecipe,
  ) {
    this.random = mulberry(recipe.seed);
    this.chain = automorphismChain(graph);
    this.turns = turnsOf(graph);
    this.finder = new BondFinder(graph.elements);
    this.far = pairsApart(graph, 3);
  }

  /** Frames in the order of the file. */
  *frames(): Generator<MadeFrame> {
    const { frames, minima, geometries, span } = this.recipe;
    const shapes = Array.from({ length: geometries }, () => this.minimum());
    const energies = Array.from({ length: minima }, () => span * Math.sqrt(this.random()));
    const order = Array.from({ length: frames }, (_, k) =>
      k < minima ? k : Math.floor(minima * this.random() ** 2),
    );
    for (let k = order.length - 1; k > 0; k--) {
      const j = Math.floor((k + 1) * this.random());
      [order[k], order[j]] = [order[j]!, order[k]!];
    }
    for (const minimum of order) {
      yield {
        positions: this.copy(shapes[minimum % geometries]!),
        energy: -83.5 + (energies[minimum]! + 0.003 * this.random()) / KCAL_PER_HARTREE,
      };
    }
  }

  /** A base with two to four bonds turned, its bonds and distances still sound. */
  private minimum(): Float64Array {
    for (;;) {
      const base = this.bases[Math.floor(this.bases.length * this.random())]!;
      for (let attempt = 0; attempt < 20; attempt++) {
        const positions = base.slice();
        const changes = 2 + Math.floor(3 * this.random());
        for (let k = 0; k < changes; k++) {
          const turn = this.turns[Math.floor(this.turns.length * this.random())]!;
          turnBond(positions, turn, 2 * Math.PI * this.random());
        }
        if (this.isSound(positions)) return positions;
      }
    }
  }

  private isSound(positions: Float64Array): boolean {
    for (let k = 0; k < this.far.length; k += 2) {
      if (distance(positions, this.far[k]!, this.far[k + 1]!) < APART) return false;
    }
    this.finder.find(positions);
    const { bonds } = this.graph;
    if (2 * this.finder.bondCount !== bonds.length || this.finder.contestedCount > 0) return false;
    return bonds.every((a, k) => a === this.finder.bonds[k]);
  }

  private copy(shape: Float64Array): Float64Array {
    const jittered = shape.slice();
    for (const turn of this.turns) turnBond(jittered, turn, this.recipe.turn * this.normal());
    const names = this.relabelling();
    const r = randomRotation(this.random);
    const shift = [0, 1, 2].map(() => 10 * this.random() - 5);
    const out = new Float64Array(shape.length);
    for (let a = 0; a < names.length; a++) {
      for (let i = 0; i < 3; i++) {
        let sum = shift[i]! + NOISE * this.normal();
        for (let j = 0; j < 3; j++) sum += r[3 * i + j]! * jittered[3 * a + j]!;
        out[3 * names[a]! + i] = sum;
      }
    }
    return out;
  }

  /** A random exchange of equivalent atoms, all equally likely. */
  private relabelling(): Int32Array {
    const p = Int32Array.from({ length: this.chain.degree }, (_, a) => a);
    for (let i = this.chain.levels.length - 1; i >= 0; i--) {
      const { transversal } = this.chain.levels[i]!;
      const u = transversal[Math.floor(transversal.length * this.random())]!;
      for (let a = 0; a < p.length; a++) p[a] = u[p[a]!]!;
    }
    return p;
  }

  private normal(): number {
    return Math.sqrt(-2 * Math.log(1 - this.random())) * Math.cos(2 * Math.PI * this.random());
  }
}

/** One bond about which the atoms of the smaller side turn. */
interface Turn {
  from: number;
  to: number;
  moved: Int32Array;
}

/** Bonds outside of rings with more on both ends, amide bonds left out. */
function turnsOf(graph: Graph): Turn[] {
  const turns: Turn[] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const [a, b] = [graph.bonds[k]!, graph.bonds[k + 1]!];
    const beyond = side(graph, a, b);
    if (beyond.includes(a) || isAmide(graph, a, b) || isAmide(graph, b, a)) continue;
    const before = side(graph, b, a);
    if (beyond.length < 2 || before.length < 2) continue;
    const smaller = beyond.length < before.length;
    turns.push({
      from: smaller ? a : b,
      to: smaller ? b : a,
      moved: Int32Array.from(smaller ? beyond : before),
    });
  }
  return turns;
}

/** Atoms reached from b without the bond to a; holds a where the bond is in a ring. */
function side(graph: Graph, a: number, b: number): number[] {
  const seen = new Set([b]);
  for (const at of seen) {
    for (let k = graph.offsets[at]!; k < graph.offsets[at + 1]!; k++) {
      const next = graph.neighbours[k]!;
      if (at !== b || next !== a) seen.add(next);
    }
  }
  return [...seen];
}

function isAmide(graph: Graph, carbon: number, nitrogen: number): boolean {
  if (graph.elements[carbon] !== 6 || graph.elements[nitrogen] !== 7) return false;
  const around = graph.neighbours.subarray(graph.offsets[carbon], graph.offsets[carbon + 1]);
  return around.some((o) => graph.elements[o] === 8 && graph.offsets[o + 1]! - graph.offsets[o]! === 1);
}

function turnBond(positions: Float64Array, { from, to, moved }: Turn, angle: number): void {
  const o = 3 * to;
  const axis = [0, 1, 2].map((i) => positions[o + i]! - positions[3 * from + i]!);
  const length = Math.hypot(...axis);
  const [x, y, z] = axis.map((v) => v / length) as [number, number, number];
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  for (const a of moved) {
    const u = positions[3 * a]! - positions[o]!;
    const v = positions[3 * a + 1]! - positions[o + 1]!;
    const w = positions[3 * a + 2]! - positions[o + 2]!;
    const along = (1 - c) * (x * u + y * v + z * w);
    positions[3 * a] = positions[o]! + c * u + s * (y * w - z * v) + along * x;
    positions[3 * a + 1] = positions[o + 1]! + c * v + s * (z * u - x * w) + along * y;
    positions[3 * a + 2] = positions[o + 2]! + c * w + s * (x * v - y * u) + along * z;
  }
}

/** Pairs of atoms that are at least so many bonds apart, flat. */
function pairsApart(graph: Graph, bonds: number): Int32Array {
  const n = graph.elements.length;
  const pairs: number[] = [];
  for (let a = 0; a < n; a++) {
    const steps = new Map([[a, 0]]);
    for (const [at, step] of steps) {
      if (step === bonds - 1) continue;
      for (let k = graph.offsets[at]!; k < graph.offsets[at + 1]!; k++) {
        const next = graph.neighbours[k]!;
        if (!steps.has(next)) steps.set(next, step + 1);
      }
    }
    for (let b = a + 1; b < n; b++) if (!steps.has(b)) pairs.push(a, b);
  }
  return Int32Array.from(pairs);
}

function randomRotation(random: () => number): number[] {
  const q = [0, 0, 0, 0];
  do for (let k = 0; k < 4; k++) q[k] = 2 * random() - 1;
  while (Math.hypot(...q) > 1 || Math.hypot(...q) < 0.1);
  const size = Math.hypot(...q);
  const [w, x, y, z] = q.map((v) => v / size) as [number, number, number, number];
  return [
    w * w + x * x - y * y - z * z,
    2 * (x * y - w * z),
    2 * (x * z + w * y),
    2 * (x * y + w * z),
    w * w - x * x + y * y - z * z,
    2 * (y * z - w * x),
    2 * (x * z - w * y),
    2 * (y * z + w * x),
    w * w - x * x - y * y + z * z,
  ];
}

function distance(p: Float64Array, a: number, b: number): number {
  return Math.hypot(p[3 * a]! - p[3 * b]!, p[3 * a + 1]! - p[3 * b + 1]!, p[3 * a + 2]! - p[3 * b + 2]!);
}

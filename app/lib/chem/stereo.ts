import type { Graph } from "../structure.ts";
import { matchParts } from "./matching.ts";
import { Refiner, type StereoUnit } from "./refine.ts";
import { neighboursOf } from "./rings.ts";

/** Below this a centre is flat and its hand undefined. */
export const FLAT = 0.1;

export type Sign = -1 | 0 | 1;

/**
 * Which of its arrangements in space a molecule has; plain data. Signs follow the numbering of the atoms: of a
 * centre, the sign of `unitValue` with its neighbours ascending; of a double bond, +1 when the lowest-numbered
 * neighbours at its two ends are cis, -1 when trans. 0 is undefined (flat, twisted).
 */
export interface Configuration {
  /** Atom and sign. */
  centres: [number, Sign][];
  /** Both atoms, the lower first, and sign. */
  doubleBonds: [number, number, Sign][];
}

/**
 * How far a unit is from flat, signed; between -1 and 1, 0.77 in an ideal tetrahedron.
 *
 * Four neighbours: det(u1 - u4, u2 - u4, u3 - u4) / 4 with unit vectors u from the centre; three: u1 . (u2 x u3).
 * Exchanging two neighbours changes the sign and nothing else. Double bond: the cosine of the torsion between the
 * lowest-numbered neighbours, with two neighbours at one end taken as the direction from one to the other.
 *
 * @param positions Å, packed; `offset` is the index of the frame's first number
 */
export function unitValue(unit: StereoUnit, positions: ArrayLike<number>, offset = 0): number {
  if (unit.kind === "double-bond") return torsionCosine(unit.atoms, unit.sides, positions, offset);
  const { atom, neighbours } = unit;
  for (let k = 0; k < neighbours.length; k++) direction(positions, offset, atom, neighbours[k]!, 3 * k);
  if (neighbours.length === 3) return determinant(scratch);
  for (let k = 0; k < 9; k++) scratch[k]! -= scratch[9 + (k % 3)]!;
  return determinant(scratch) / 4;
}

/** Sign of a unit: flat below 0.10, twisted between 60° and 120°, then 0. */
export function unitSign(unit: StereoUnit, positions: ArrayLike<number>, offset = 0): Sign {
  const value = unitValue(unit, positions, offset);
  const least = unit.kind === "centre" ? FLAT : 0.5;
  return value >= least ? 1 : value <= -least ? -1 : 0;
}

/**
 * Whether a bond that may be double is so by its length, in Å: C=C below 1.40,
 * C=N below 1.33, N=N below 1.32 (halfway between double and conjugated single bonds: common practice, no source).
 */
export function isDouble(graph: Graph, unit: StereoUnit, length: number): boolean {
  if (unit.kind === "centre") return false;
  const nitrogens = unit.atoms.filter((a) => graph.elements[a] === 7).length;
  return length < [1.4, 1.33, 1.32][nitrogens]!;
}

/** Units with their signs, as plain data. */
export function toConfiguration(units: readonly StereoUnit[], signs: ArrayLike<number>): Configuration {
  const configuration: Configuration = { centres: [], doubleBonds: [] };
  units.forEach((unit, u) => {
    const sign = Math.sign(signs[u]!) as Sign;
    if (unit.kind === "centre") configuration.centres.push([unit.atom, sign]);
    else configuration.doubleBonds.push([unit.atoms[0], unit.atoms[1], sign]);
  });
  return configuration;
}

/** The units and signs behind plain data; the neighbours come from the graph. */
export function fromConfiguration(
  graph: Graph,
  configuration: Configuration,
): { units: StereoUnit[]; signs: Int8Array } {
  const others = (at: number, but: number): number[] => [...neighboursOf(graph, at)].filter((a) => a !== but);
  const units: StereoUnit[] = [
    ...configuration.centres.map(
      ([atom]): StereoUnit => ({ kind: "centre", atom, neighbours: others(atom, -1) }),
    ),
    ...configuration.doubleBonds.map(
      ([i, j]): StereoUnit => ({ kind: "double-bond", atoms: [i, j], sides: [others(i, j), others(j, i)] }),
    ),
  ];
  const signs = [
    ...configuration.centres.map(([, sign]) => sign),
    ...configuration.doubleBonds.map(([, , sign]) => sign),
  ];
  return { units, signs: Int8Array.from(signs) };
}

/** Turned patterns that are compared to find in what two configurations differ. */
const MOST_TURNS = 300;

/**
 * Compares configurations of one molecule: two are the same when some exchange of equivalent atoms carries the signs
 * of one onto those of the other. No group is enumerated.
 */
export class ConfigurationComparer {
  private readonly graph: Graph;
  private readonly units: readonly StereoUnit[];
  /** True when no exchange of atoms touches a unit: signs can then be compared one by one. */
  private readonly fixed: boolean;

  constructor(graph: Graph, units: readonly StereoUnit[]) {
    this.graph = graph;
    this.units = units;
    const refiner = new Refiner([{ graph }]);
    const colours = refiner.initial();
    refiner.refine(colours);
    const sizes = new Map<number, number>();
    for (const colour of colours) sizes.set(colour, (sizes.get(colour) ?? 0) + 1);
    const alone = (a: number): boolean => sizes.get(colours[a]!) === 1;
    this.fixed = units.every((unit) =>
      unit.kind === "centre"
        ? alone(unit.atom) && unit.neighbours.every(alone)
        : unit.atoms.every(alone) && unit.sides.flat().every(alone),
    );
  }

  /**
   * The exchange of atoms that carries signs `a` onto signs `b`, or null. A 0 fits any sign.
   *
   * @example // in trans-1,4-dimethylcyclohexane both signs turned are the same configuration
   * comparer.mapping([1, -1], [-1, 1]) !== null // true
   */
  mapping(a: ArrayLike<number>, b: ArrayLike<number>): Int32Array | null {
    const filled = this.units.map((_, u) => (a[u] === 0 || b[u] === 0 ? 0 : 1));
    if (this.units.every((_, u) => filled[u] === 0 || a[u] === b[u])) return this.identity();
    if (this.fixed) return null;
    return this.search(a, b);
  }

  same(a: ArrayLike<number>, b: ArrayLike<number>): boolean {
    return this.mapping(a, b) !== null;
  }

  /** A number equal for equal configurations, and nearly always different for different ones. */
  invariant(signs: ArrayLike<number>): string {
    if (this.fixed) return Array.from(this.units, (_, u) => signs[u]).join();
    const refiner = new Refiner([{ graph: this.graph, units: this.units, signs }]);
    refiner.refine(refiner.initial());
    return refiner.trace.join();
  }

  /**
   * The units to name as different: one or two whose turning makes `b` the same as `a`, else all with another sign.
   *
   * @returns indices of units
   */
  difference(a: ArrayLike<number>, b: ArrayLike<number>): number[] {
    const turned = (which: readonly number[]): Int8Array => {
      const signs = Int8Array.from(b);
      for (const u of which) signs[u] = -signs[u]!;
      return signs;
    };
    const all = this.units.flatMap((_, u) => (a[u] !== 0 && b[u] !== 0 && a[u] !== b[u] ? [u] : []));
    if (this.fixed || all.length === 1) return all;
    const can = this.units.flatMap((_, u) => (b[u] === 0 ? [] : [u]));
    // Of equal choices the one that has another sign in place is the one a reader expects.
    can.sort((u, v) => Number(all.includes(v)) - Number(all.includes(u)));
    for (const u of can) if (this.same(a, turned([u]))) return [u];
    if (can.length > 12) return all;
    for (const u of can) {
      for (const v of can) if (v > u && this.same(a, turned([u, v]))) return [u, v];
    }
    return all;
  }

  /**
   * The smallest sets of units whose turning in `a` gives the configuration of `b`: several where equivalent atoms leave
   * open which. They depend on the configuration of `b` alone, not on which of its equal patterns of signs it is.
   *
   * @returns sets of indices of units, in order; none where `MOST_TURNS` trials do not find any
   * @example // 1,2-dichloro-1,2-difluoroethane, R,R and a meso frame
   * comparer.turns([1, 1], [1, -1]) // [[0], [1]]
   */
  turns(a: ArrayLike<number>, b: ArrayLike<number>): number[][] {
    const can = this.units.flatMap((_, u) => (a[u] === 0 || b[u] === 0 ? [] : [u]));
    let trials = 0;
    for (let size = 1; size <= can.length; size++) {
      const found: number[][] = [];
      for (const set of subsets(can, size)) {
        trials += 1;
        if (trials > MOST_TURNS) return [];
        const signs = Int8Array.from(a);
        for (const u of set) signs[u] = -signs[u]!;
        if (this.same(signs, b)) found.push(set);
      }
      if (found.length > 0) return found;
    }
    return [];
  }

  private search(a: ArrayLike<number>, b: ArrayLike<number>): Int32Array | null {
    // What is undefined on either side is tried both ways: seldom more than one or two units.
    const open = this.units.flatMap((_, u) => (a[u] === 0 || b[u] === 0 ? [u] : []));
    const tries = open.length <= 6 ? 2 ** open.length : 1;
    for (let k = 0; k < tries; k++) {
      const left = Int8Array.from(a);
      const right = Int8Array.from(b);
      open.forEach((u, bit) => {
        const other = (k >> bit) & 1 ? -1 : 1;
        if (left[u] === 0 && right[u] === 0) left[u] = 1;
        if (left[u] === 0) left[u] = right[u]! * other;
        else if (right[u] === 0) right[u] = left[u]! * other;
      });
      const found = matchParts(
        { graph: this.graph, units: this.units, signs: left },
        { graph: this.graph, units: this.units, signs: right },
      );
      if (found === "undecided")
        return this.invariant(left) === this.invariant(right) ? this.identity() : null;
      if (found) return found;
    }
    return null;
  }

  private identity(): Int32Array {
    return Int32Array.from(this.graph.elements, (_, atom) => atom);
  }
}

/** Sets of `size` of these, in order. */
function* subsets(of: readonly number[], size: number, from = 0): Generator<number[], void, undefined> {
  if (size === 0) yield [];
  for (let k = from; size > 0 && k <= of.length - size; k++) {
    for (const rest of subsets(of, size - 1, k + 1)) yield [of[k]!, ...rest];
  }
}

// --- geometry ---------------------------------------------------------------------------------

const scratch = new Float64Array(12);

function direction(positions: ArrayLike<number>, offset: number, from: number, to: number, at: number): void {
  const f = offset + 3 * from;
  const t = offset + 3 * to;
  const x = positions[t]! - positions[f]!;
  const y = positions[t + 1]! - positions[f + 1]!;
  const z = positions[t + 2]! - positions[f + 2]!;
  const length = Math.sqrt(x * x + y * y + z * z) || 1;
  scratch[at] = x / length;
  scratch[at + 1] = y / length;
  scratch[at + 2] = z / length;
}

function determinant(m: Float64Array): number {
  return (
    m[0]! * (m[4]! * m[8]! - m[5]! * m[7]!) -
    m[1]! * (m[3]! * m[8]! - m[5]! * m[6]!) +
    m[2]! * (m[3]! * m[7]! - m[4]! * m[6]!)
  );
}

function torsionCosine(
  atoms: readonly [number, number],
  sides: readonly [readonly number[], readonly number[]],
  positions: ArrayLike<number>,
  offset: number,
): number {
  direction(positions, offset, atoms[0], atoms[1], 0);
  across(positions, offset, atoms[0], sides[0], 3);
  across(positions, offset, atoms[1], sides[1], 9);
  const size = Math.sqrt(dot(3, 3) * dot(9, 9));
  return size > 0 ? dot(3, 9) / size : 0;
}

/** Where the neighbours at one end of a double bond point, at right angles to the bond (in scratch 0); into scratch `to`. */
function across(
  positions: ArrayLike<number>,
  offset: number,
  atom: number,
  side: readonly number[],
  to: number,
): void {
  direction(positions, offset, atom, side[0]!, to);
  if (side.length > 1) {
    direction(positions, offset, atom, side[1]!, 6);
    for (let k = 0; k < 3; k++) scratch[to + k]! -= scratch[6 + k]!;
  }
  const along = dot(to, 0);
  for (let k = 0; k < 3; k++) scratch[to + k]! -= along * scratch[k]!;
}

function dot(a: number, b: number): number {
  return scratch[a]! * scratch[b]! + scratch[a + 1]! * scratch[b + 1]! + scratch[a + 2]! * scratch[b + 2]!;
}

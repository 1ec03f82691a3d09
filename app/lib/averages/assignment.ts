import { neighboursOf } from "../chem/rings.ts";
import { refineColours } from "../chem/signature.ts";
import type { Graph } from "../structure.ts";
import { type MeasuredGroup, type Nucleus, type SetBeside, setBeside } from "./measured.ts";
import type { Agreement, Line } from "./shielding-fit.ts";

/**
 * Pairs of groups whose signals the bonds alone do not tell apart, so that an experiment may have assigned them either
 * way: the two hydrogens of a CH2 beside a stereocentre, the two methyls of an isopropyl group there, and parts of a
 * group taken apart by hand. Of more than two alike the nearest through bonds make a pair.
 *
 * @param groups atoms (from 0) of each signal
 * @returns places in `groups`, the pair of the lowest atoms first
 * @example assignmentPairs(glycerol, [[6], [7], [8], [9]]) // [[0, 1], [2, 3]]
 */
export function assignmentPairs(graph: Graph, groups: readonly (readonly number[])[]): [number, number][] {
  const colours = refineColours(graph);
  const alike = new Map<string, number[]>();
  for (const [place, atoms] of groups.entries()) {
    const key = `${colours[atoms[0] ?? -1]} ${atoms.length}`;
    alike.set(key, [...(alike.get(key) ?? []), place]);
  }
  const pairs: [number, number][] = [];
  for (const places of alike.values()) {
    const free = new Set(places);
    const near = places.flatMap((a, k) =>
      places.slice(k + 1).map((b) => ({ a, b, way: bondsBetween(graph, groups[a] ?? [], groups[b] ?? []) })),
    );
    for (const { a, b } of near.sort((x, y) => x.way - y.way || x.a - y.a || x.b - y.b)) {
      if (!free.has(a) || !free.has(b)) continue;
      free.delete(a);
      free.delete(b);
      pairs.push([a, b]);
    }
  }
  return pairs.sort((x, y) => (groups[x[0]]?.[0] ?? 0) - (groups[y[0]]?.[0] ?? 0));
}

/** Fewest bonds from one group to the other. */
function bondsBetween(graph: Graph, from: readonly number[], to: readonly number[]): number {
  const wanted = new Set(to);
  const seen = new Set(from);
  let front = [...from];
  for (let way = 0; front.length > 0; way++) {
    if (front.some((atom) => wanted.has(atom))) return way;
    front = front.flatMap((atom) => [...neighboursOf(graph, atom)].filter((next) => !seen.has(next)));
    front = [...new Set(front)];
    for (const atom of front) seen.add(atom);
  }
  return Number.POSITIVE_INFINITY;
}

/** Values as they are assigned: those of the pairs chosen to be swapped change places. */
function assigned(
  groups: readonly MeasuredGroup[],
  pairs: readonly (readonly [number, number])[],
  swapped: ReadonlySet<number>,
): MeasuredGroup[] {
  const values = new Map(groups.map(({ atom, measured }) => [atom, measured]));
  const partner = new Map(
    pairs.filter(([a]) => swapped.has(a)).flatMap(([a, b]) => [[a, b] as const, [b, a] as const]),
  );
  return groups.map((group) => ({
    ...group,
    measured: values.get(partner.get(group.atom) ?? group.atom) ?? null,
  }));
}

/** How one assignment of a pair meets the experiment. */
export interface AssignmentFit {
  /** Mean absolute deviation of the two. */
  pairMad: number;
  /** Of all values of the nucleus, the other pairs as they are chosen. */
  nucleus: Agreement;
}

/** Both assignments of a pair, and the one chosen. */
export interface PairAssignment {
  /** First atoms of the two groups, from 1; the lower one stands for the pair. */
  atoms: [number, number];
  z: number;
  swapped: boolean;
  entered: AssignmentFit;
  exchanged: AssignmentFit;
}

export interface Compared {
  nuclei: Nucleus[];
  pairs: PairAssignment[];
}

/**
 * Averages beside measured values with the assignments chosen, and both assignments of every pair that could be swapped
 * and whose two values differ.
 *
 * @param groups with the values as they were entered
 * @param pairs first atoms (from 1) of groups that could be swapped, as `assignmentPairs` finds them
 * @example compareMeasured(groups, { shieldings: false, scaling: new Map(), pairs: [[6, 7]], swapped: new Set() })
 */
export function compareMeasured(
  groups: readonly MeasuredGroup[],
  options: {
    shieldings: boolean;
    scaling: ReadonlyMap<number, Omit<Line, "n">>;
    pairs: readonly (readonly [number, number])[];
    swapped: ReadonlySet<number>;
  },
): Compared {
  const { pairs, swapped } = options;
  const fitOf = (pair: readonly [number, number], chosen: ReadonlySet<number>) =>
    fitWith(setBeside(assigned(groups, pairs, chosen), options), pair);
  const measured = new Map(groups.map((group) => [group.atom, group.measured]));
  return {
    nuclei: setBeside(assigned(groups, pairs, swapped), options),
    pairs: pairs.flatMap((pair): PairAssignment[] => {
      const [a, b] = pair;
      const [first, second] = [measured.get(a) ?? null, measured.get(b) ?? null];
      if (first === null || second === null || first === second) return [];
      const without = new Set([...swapped].filter((atom) => atom !== a));
      const entered = fitOf(pair, without);
      const exchanged = fitOf(pair, new Set([...without, a]));
      const z = groups.find((group) => group.atom === a)?.z ?? 0;
      if (entered === null || exchanged === null) return [];
      return [{ atoms: [a, b], z, swapped: swapped.has(a), entered, exchanged }];
    }),
  };
}

function fitWith(nuclei: readonly Nucleus[], [a, b]: readonly [number, number]): AssignmentFit | null {
  const own = nuclei.find(({ groups }) => groups.some(({ atom }) => atom === a));
  const of = (atom: number): SetBeside | undefined => own?.groups.find((group) => group.atom === atom);
  const [first, second] = [of(a)?.difference ?? null, of(b)?.difference ?? null];
  if (!own?.agreement || first === null || second === null) return null;
  return { pairMad: (Math.abs(first) + Math.abs(second)) / 2, nucleus: own.agreement };
}

import { neighboursOf } from "../chem/rings.ts";
import { angle, distance, torsion, wrapDegrees } from "../measure/geometry.ts";
import type { Graph } from "../structure.ts";
import {
  BETA_SHARE,
  electronegativityExcess,
  GENERAL_SET,
  generalCoupling,
  KARPLUS_SETS,
  karplus,
  OWN_SET,
  type Substituent,
} from "./karplus.ts";
import { peptideAngle, peptideChain } from "./peptide.ts";
import type { AverageRule } from "./rule.ts";

export type ObservableKind = "distance" | "angle" | "torsion" | "coupling";

/** A quantity picked on the structure. Atoms count from 0; several tuples where equivalent ones are averaged first. */
export interface Observable {
  kind: ObservableKind;
  tuples: readonly (readonly number[])[];
  /** Of a distance: how equivalent pairs, and then conformers, are averaged. */
  rule: AverageRule;
  /** Of a coupling: id of a parameter set, or "own" with A, B, C. */
  set: string | null;
  own: { a: number; b: number; c: number } | null;
  /**
   * Of a coupling by a peptide set: "phi" takes t = phi - 60 degrees of the residue, else t is the picked torsion.
   * Columns of before this was told apart, and atoms without such a chain, keep the picked torsion.
   */
  angle?: "phi";
  /**
   * "file" takes these very atoms as each frame numbers them, which have equivalent ones that nobody wanted averaged in:
   * the same as a torsion of them does. Else hands tell in each frame which atoms are meant.
   */
  numbered?: "file";
}

export const OBSERVABLE_UNIT: Record<ObservableKind, string> = {
  distance: "Å",
  angle: "°",
  torsion: "°",
  coupling: "Hz",
};

/** Atoms that each kind takes. */
export const OBSERVABLE_ATOMS: Record<ObservableKind, number> = {
  distance: 2,
  angle: 3,
  torsion: 4,
  coupling: 4,
};

/** What a definition as stored holds; atoms count from 1 there. */
export interface ObservableDefinition {
  type: "observable";
  observable: ObservableKind;
  atoms: number[][];
  parameters: Record<string, number | string>;
}

export function toDefinition(observable: Observable): ObservableDefinition {
  const { kind, tuples, rule, set, own, angle: from, numbered } = observable;
  return {
    type: "observable",
    observable: kind,
    atoms: tuples.map((tuple) => tuple.map((atom) => atom + 1)),
    parameters: {
      rule,
      ...(set === null ? {} : { set }),
      ...(own ?? {}),
      ...(from === undefined ? {} : { angle: from }),
      ...(numbered === undefined ? {} : { numbered }),
    },
  };
}

export function fromDefinition(definition: ObservableDefinition, rule: AverageRule): Observable {
  const { a, b, c, set, angle: from, numbered } = definition.parameters;
  return {
    kind: definition.observable,
    tuples: definition.atoms.map((tuple) => tuple.map((atom) => atom - 1)),
    rule,
    set: typeof set === "string" ? set : null,
    own: typeof a === "number" && typeof b === "number" && typeof c === "number" ? { a, b, c } : null,
    ...(from === "phi" ? { angle: from } : {}),
    ...(numbered === "file" ? { numbered } : {}),
  };
}

/** Whether a set is one of those for 3J(HN-HA), and these atoms stand in the chain that gives its phi. */
export function takesPhi(set: string | null, graph: Graph, path: readonly number[]): boolean {
  return KARPLUS_SETS.some((one) => one.id === set) && peptideChain(graph, path) !== null;
}

/**
 * The first two atoms, one after the other in a pick, that no bond joins.
 *
 * @returns null where the atoms are bonded in a row
 * @example firstUnbonded(butane, [0, 1, 2, 5]) // [2, 5]
 */
export function firstUnbonded(graph: Graph, path: readonly number[]): [number, number] | null {
  for (const [k, atom] of path.entries()) {
    const next = path[k + 1];
    if (next !== undefined && !neighboursOf(graph, atom).includes(next)) return [atom, next];
  }
  return null;
}

/**
 * Whether the general set fits a path: H-C-C-H between two carbons with four neighbours each, all substituents of known
 * electronegativity.
 *
 * @returns null where it fits, else why not, in words
 */
export function whyNotGeneral(graph: Graph, path: readonly number[]): string | null {
  const [h1, c1, c2, h2] = path as [number, number, number, number];
  const z = (atom: number) => graph.elements[atom];
  const bonded = (a: number, b: number) => neighboursOf(graph, a).includes(b);
  if (z(h1) !== 1 || z(h2) !== 1 || z(c1) !== 6 || z(c2) !== 6) return "It takes H, C, C and H.";
  if (!bonded(h1, c1) || !bonded(c1, c2) || !bonded(c2, h2))
    return "The four atoms have to be bonded in a row.";
  if (neighboursOf(graph, c1).length !== 4 || neighboursOf(graph, c2).length !== 4)
    return "Both carbons have to have four neighbours.";
  for (const carbon of [c1, c2]) {
    for (const atom of neighboursOf(graph, carbon)) {
      if (electronegativityExcess(graph.elements[atom]!) === null)
        return "The electronegativity of a substituent is not listed.";
    }
  }
  return null;
}

/** Substituents of a path H-C-C-H with their excess, those that they carry taken into account, and their sign. */
function substituentsOf(graph: Graph, positions: ArrayLike<number>, path: readonly number[]): Substituent[] {
  const [h1, c1, c2, h2] = path as [number, number, number, number];
  const found: Substituent[] = [];
  for (const [own, other, coupled, far] of [
    [c1, c2, h1, h2],
    [c2, c1, h2, h1],
  ] as const) {
    const here = torsion(positions, coupled, own, other, far);
    for (const atom of neighboursOf(graph, own)) {
      if (atom === coupled || atom === other) continue;
      const at = torsion(positions, atom, own, other, far);
      if (here === null || at === null) continue;
      // Seen from `own`, the place of a front atom is that of the far one less its torsion.
      const sign = wrapDegrees(here - at) > 0 ? 1 : -1;
      found.push({ excess: excessOf(graph, atom, own), sign });
    }
  }
  return found;
}

function excessOf(graph: Graph, atom: number, carrier: number): number {
  let beta = 0;
  for (const next of neighboursOf(graph, atom)) {
    if (next !== carrier) beta += electronegativityExcess(graph.elements[next]!) ?? 0;
  }
  return (electronegativityExcess(graph.elements[atom]!) ?? 0) - BETA_SHARE * beta;
}

/**
 * An observable in one structure: equivalent pairs averaged first by the rule of the distance, couplings and angles by
 * their plain mean. A coupling is computed for each torsion and then averaged, never the angle.
 *
 * @param positions Å, packed
 * @param relabel where each atom of the reference stands in this frame; left out where it is numbered alike
 * @returns Å, degrees or Hz; null where undefined (atoms on one line, or at one place)
 * @throws RangeError on an unknown parameter set
 */
export function observableValue(
  observable: Observable,
  graph: Graph,
  positions: ArrayLike<number>,
  relabel: ArrayLike<number> | null = null,
): number | null {
  // A torsion of one tuple means these very atoms; only sums over equivalent ones may be renumbered.
  const sums = observable.kind === "distance" || observable.kind === "coupling";
  const renumber = relabel !== null && sums && observable.numbered === undefined;
  const values: number[] = [];
  for (const tuple of observable.tuples) {
    const atoms = renumber ? tuple.map((atom) => relabel[atom]!) : tuple;
    const value = tupleValue(observable, graph, positions, atoms);
    if (value === null) return null;
    values.push(value);
  }
  return values.length === 1 ? values[0]! : mergedValue(observable, values);
}

function mergedValue({ kind, rule }: Observable, values: readonly number[]): number | null {
  const power = kind === "distance" ? { "r-6": -6, "r-3": -3 }[rule as "r-6" | "r-3"] : undefined;
  if (power === undefined) return values.reduce((total, value) => total + value, 0) / values.length;
  if (values.some((value) => !(value > 0))) return null;
  const mean = values.reduce((total, value) => total + value ** power, 0) / values.length;
  return mean ** (1 / power);
}

function tupleValue(
  observable: Observable,
  graph: Graph,
  positions: ArrayLike<number>,
  atoms: readonly number[],
): number | null {
  const [i, j, k, l] = atoms as [number, number, number, number];
  switch (observable.kind) {
    case "distance": {
      const value = distance(positions, i, j);
      return value > 0 ? value : null;
    }
    case "angle":
      return angle(positions, i, j, k);
    case "torsion":
      return torsion(positions, i, j, k, l);
    case "coupling": {
      const chain = observable.angle === "phi" ? peptideChain(graph, atoms) : null;
      const turned = chain === null ? torsion(positions, i, j, k, l) : peptideAngle(positions, chain);
      return turned === null ? null : couplingOf(observable, graph, positions, atoms, turned);
    }
  }
}

function couplingOf(
  { set, own }: Observable,
  graph: Graph,
  positions: ArrayLike<number>,
  atoms: readonly number[],
  turned: number,
): number {
  if (set === GENERAL_SET) return generalCoupling(turned, substituentsOf(graph, positions, atoms));
  const found = set === OWN_SET ? own : KARPLUS_SETS.find((one) => one.id === set);
  if (!found) throw new RangeError(`There is no parameter set “${set}”.`);
  return karplus(turned, found);
}

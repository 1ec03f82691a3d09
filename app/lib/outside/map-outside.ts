import { hillFormula } from "../chem/formula.ts";
import { fragmentsOf, neighboursOf } from "../chem/rings.ts";
import { isomorphism } from "../chem/signature.ts";
import { plural } from "../format.ts";
import { type AtomSet, type Graph, isPolarHydrogen, makeGraph, selectAtoms } from "../structure.ts";

/** A structure from outside: a crystal, a bound pose, in whatever order its file has the atoms. */
export interface OutsideMolecule {
  elements: Uint8Array;
  /** Flat pairs from 0. */
  bonds: ArrayLike<number>;
}

export interface OutsideMapping {
  /** Atom of the structure for each atom of the ensemble; -1 for a hydrogen that it does not show. */
  map: Int32Array;
  /** The largest set of atoms that could be mapped: comparisons cannot take more. */
  atoms: AtomSet;
  /** What the structure has beside the molecule, and which hydrogens are missing or differ. */
  remarks: string[];
}

const SETS: readonly AtomSet[] = ["all", "heavy+polarH", "heavy"];

/**
 * Maps a structure from outside onto the molecule of an ensemble by connectivity: with all hydrogens where they agree,
 * else with those on N, O, S and P, else by heavy atoms alone. Other molecules in the file (water, a counter-ion) are
 * left out. Hydrogens on carbon, where the structure shows any, have to agree: they tell benzene from cyclohexane.
 *
 * @returns the mapping, or in words why there is none
 * @example mapOutside(graph, { elements, bonds: perceiveBonds(elements, positions).bonds })
 */
export function mapOutside(graph: Graph, outside: OutsideMolecule): OutsideMapping | { refused: string } {
  const whole = makeGraph(outside.elements, outside.bonds);
  const every = Array.from(outside.elements.keys()).filter((atom) => outside.elements[atom] !== 0);
  const parts = partsOf(whole);
  // The molecule itself may consist of several parts; else the one part of the file that is the molecule counts.
  for (const atoms of parts.length > 1 ? [every, ...parts] : [every]) {
    const mapped = mapPart(graph, whole, atoms);
    if (mapped === null) continue;
    const others = every.length - atoms.length;
    if (others > 0) {
      mapped.remarks.push(
        `${plural(others, "atom")} of other molecules in the file ${others === 1 ? "was" : "were"} left out.`,
      );
    }
    return mapped;
  }
  return { refused: refusal(graph, whole, parts) };
}

function partsOf(graph: Graph): number[][] {
  const parts: number[][] = [];
  fragmentsOf(graph).forEach((part, atom) => {
    if (part >= 0) {
      parts[part] ??= [];
      parts[part].push(atom);
    }
  });
  return parts.sort((a, b) => b.length - a.length);
}

function mapPart(graph: Graph, whole: Graph, atoms: readonly number[]): OutsideMapping | null {
  const part = induced(whole, atoms);
  const shown = carbonHydrogens(part.graph);
  const explicit = shown.some((count) => count > 0);
  for (const set of SETS) {
    const own = induced(graph, [...selectAtoms(graph, set)]);
    const theirs = induced(part.graph, [...selectAtoms(part.graph, set)]);
    const colours = (from: Graph, { back }: Induced) => {
      const counts = carbonHydrogens(from);
      return back.map((atom) => (explicit ? counts[atom]! : 0));
    };
    const found = isomorphism(own.graph, theirs.graph, {
      colours: [colours(graph, own), colours(part.graph, theirs)],
    });
    if (found === null) continue;
    const map = new Int32Array(graph.elements.length).fill(-1);
    found.forEach((at, k) => {
      map[own.back[k]!] = part.back[theirs.back[at]!]!;
    });
    return { map, atoms: set, remarks: hydrogenRemarks(graph, part.graph, set) };
  }
  return null;
}

interface Induced {
  graph: Graph;
  /** Atom of the larger graph for each atom. */
  back: number[];
}

/** The part of a graph over some atoms; isotopes do not count, as crystals are measured with them and without. */
function induced(graph: Graph, atoms: readonly number[]): Induced {
  const at = new Map(atoms.map((atom, k) => [atom, k]));
  const bonds: number[] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const [a, b] = [at.get(graph.bonds[k]!), at.get(graph.bonds[k + 1]!)];
    if (a !== undefined && b !== undefined) bonds.push(a, b);
  }
  const elements = Uint8Array.from(atoms, (atom) => graph.elements[atom]!);
  return { graph: makeGraph(elements, bonds), back: [...atoms] };
}

/** Hydrogens at each carbon; 0 at other atoms. */
function carbonHydrogens(graph: Graph): number[] {
  return Array.from(graph.elements, (z, atom) =>
    z === 6 ? [...neighboursOf(graph, atom)].filter((other) => graph.elements[other] === 1).length : 0,
  );
}

function hydrogenRemarks(graph: Graph, part: Graph, set: AtomSet): string[] {
  if (set === "all") return [];
  const count = (of: Graph, polar: boolean) =>
    Array.from(of.elements.keys()).filter(
      (atom) => of.elements[atom] === 1 && (!polar || isPolarHydrogen(of, atom)),
    ).length;
  const [own, theirs] = [count(graph, false), count(part, false)];
  if (theirs === 0) return ["It shows no hydrogens: it is mapped and compared on its heavy atoms."];
  if (set === "heavy+polarH")
    return [`It shows ${theirs} of ${own} hydrogens: it is mapped and compared with those on N, O, S and P.`];
  const [ownPolar, theirPolar] = [count(graph, true), count(part, true)];
  return [
    `Its hydrogens on N, O, S and P differ from the ensemble's (${theirPolar} against ${ownPolar}, or at other atoms): another charge or tautomer. It is mapped and compared on its heavy atoms.`,
  ];
}

function refusal(graph: Graph, whole: Graph, parts: readonly number[][]): string {
  const heavy = (of: Graph, atoms: Iterable<number>) =>
    hillFormula([...atoms].map((atom) => of.elements[atom]!).filter((z) => z > 1));
  const own = heavy(graph, graph.elements.keys());
  const candidates = parts.map((atoms) => heavy(whole, atoms));
  if (candidates.includes(own) || heavy(whole, whole.elements.keys()) === own) {
    return `The structure has the heavy atoms of this molecule (${own}), but they are bonded otherwise, or carry other numbers of hydrogens on carbon: it is another compound, or a bond is too long to be seen. Check it, or send it as SDF with its bonds.`;
  }
  return `The structure's heavy atoms are ${candidates[0] ?? "none"}, those of this ensemble ${own}: it is another molecule. Send one of this molecule, without its surroundings.`;
}

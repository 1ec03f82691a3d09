import { matchParts } from "../chem/matching.ts";
import type { DoubleBond, StereoUnit } from "../chem/refine.ts";
import { degreeOf, neighboursOf, wayAround } from "../chem/rings.ts";
import { refineColours } from "../chem/signature.ts";
import { isDouble, unitSign } from "../chem/stereo.ts";
import { distance } from "../measure/geometry.ts";
import type { Graph } from "../structure.ts";

/** Elements whose four-coordinate atoms are tetrahedral, and whose three-coordinate atoms are pyramids that do not invert. */
const FOUR = new Set([5, 6, 7, 14, 15, 16, 32, 33, 34, 50, 51, 52]);
const THREE = new Set([15, 16, 33, 34, 51, 52]);
/** A double bond in a ring of fewer atoms has no sides to choose. */
const SMALLEST_TRANS_RING = 8;
/** One pair of atoms may take so many rounds times atoms; past it the two are kept apart. */
const WORK_LIMIT = 4e6;

/**
 * Every place whose hand an exchange of atoms has to keep: each four-coordinate centre, CH2 and CH3 included, pyramids
 * of S and P, and the sides of every double bond outside small rings. (For telling configurations apart fewer places
 * count: there CH2 and CH3 hold nothing.)
 *
 * @param positions of one frame in Å, packed: lengths tell which bonds are double
 */
export function parityUnits(graph: Graph, positions: ArrayLike<number>): StereoUnit[] {
  const units: StereoUnit[] = [];
  for (let atom = 0; atom < graph.elements.length; atom++) {
    const degree = degreeOf(graph, atom);
    const holds = degree === 4 ? FOUR : degree === 3 ? THREE : null;
    if (holds?.has(graph.elements[atom]!)) {
      units.push({ kind: "centre", atom, neighbours: [...neighboursOf(graph, atom)] });
    }
  }
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const unit = doubleBond(graph, graph.bonds[k]!, graph.bonds[k + 1]!);
    if (unit && isDouble(graph, unit, distance(positions, ...unit.atoms))) units.push(unit);
  }
  return units;
}

function doubleBond(graph: Graph, i: number, j: number): DoubleBond | null {
  const canEnd = (atom: number) =>
    (graph.elements[atom] === 6 && degreeOf(graph, atom) === 3) ||
    (graph.elements[atom] === 7 && degreeOf(graph, atom) === 2);
  if (!canEnd(i) || !canEnd(j) || wayAround(graph, i, j) + 1 < SMALLEST_TRANS_RING) return null;
  const others = (at: number, but: number) => [...neighboursOf(graph, at)].filter((atom) => atom !== but);
  return { kind: "double-bond", atoms: [i, j], sides: [others(i, j), others(j, i)] };
}

/**
 * The exchanges of equivalent atoms that keep the hand of every centre and the sides of every double bond; in an achiral
 * molecule also those that turn every hand. Atoms that they carry into each other give one signal; diastereotopic ones
 * of a CH2 stay apart (Longuet-Higgins, Mol. Phys. 1963, 6, 445, on permutations that a molecule can carry out; from
 * memory). Slow rotors (amides, hindered biaryls) are taken to turn.
 */
export class ParityGroup {
  readonly graph: Graph;
  private readonly units: readonly StereoUnit[];
  private readonly signs: Int8Array;
  private readonly hands: readonly Int8Array[];
  private readonly known = new Map<string, Int32Array | null>();

  /**
   * @param positions of the frame that the hands are read from, Å, packed
   * @param achiral true where mirror images of the molecule are the same substance
   */
  constructor(graph: Graph, positions: ArrayLike<number>, achiral: boolean) {
    this.graph = graph;
    this.units = parityUnits(graph, positions);
    this.signs = this.signsOf(positions);
    this.hands = achiral ? [this.signs, this.inverted(this.signs)] : [this.signs];
  }

  /** Hands of a frame; 0 where flat or twisted, which fits either. */
  signsOf(positions: ArrayLike<number>, offset = 0): Int8Array {
    return Int8Array.from(this.units, (unit) => unitSign(unit, positions, offset));
  }

  private inverted(signs: Int8Array): Int8Array {
    return signs.map((sign, u) => (this.units[u]!.kind === "centre" ? -sign : sign));
  }

  /** An exchange that carries each atom of `from` to its partner in `to`; null where there is none. */
  exchange(from: readonly number[], to: readonly number[]): Int32Array | null {
    const mark = (atoms: readonly number[]) => {
      const colours = new Uint16Array(this.graph.elements.length);
      for (const [k, atom] of atoms.entries()) colours[atom] = colours[atom]! * 8 + k + 1;
      return colours;
    };
    for (const hand of this.hands) {
      const found = matchParts(
        { graph: this.graph, colours: mark(from), units: this.units, signs: this.signs },
        { graph: this.graph, colours: mark(to), units: this.units, signs: hand },
        { everyAtom: true, workLimit: WORK_LIMIT },
      );
      if (found instanceof Int32Array) return found;
    }
    return null;
  }

  /**
   * Equivalent atoms as the smallest atom of each class.
   *
   * @param among only these atoms need be right; all where left out
   */
  classes(among?: readonly number[]): Int32Array {
    const n = this.graph.elements.length;
    const parent = Int32Array.from({ length: n }, (_, atom) => atom);
    const root = (atom: number) => {
      let at = atom;
      while (parent[at] !== at) at = parent[at]!;
      return at;
    };
    const colours = refineColours(this.graph);
    const firsts = new Map<number, number[]>();
    for (const atom of [...(among ?? parent.keys())].sort((a, b) => a - b)) {
      const list = firsts.get(colours[atom]!) ?? [];
      firsts.set(colours[atom]!, list);
      if (list.some((first) => root(first) === root(atom))) continue;
      const partner = list.some((first) => {
        const found = this.exchange([first], [atom]);
        found?.forEach((image, from) => {
          const [one, other] = [root(from), root(image)];
          if (one !== other) parent[Math.max(one, other)] = Math.min(one, other);
        });
        return found !== null;
      });
      if (!partner) list.push(atom);
    }
    return Int32Array.from(parent.keys(), root);
  }

  /**
   * All tuples of atoms that exchanges carry one tuple to, itself first, then by rising atom numbers: the pairs of
   * protons behind one contact, the torsions behind one coupling.
   *
   * @param most beyond so many the search stops, and null is returned
   * @example group.orbit([methylH, orthoH]).length // 6: three hydrogens times two sides
   */
  orbit(tuple: readonly number[], most = 200): number[][] | null {
    const classes = this.classes();
    const choices = tuple.map((atom) =>
      [...classes.keys()].filter((other) => classes[other] === classes[atom]),
    );
    const found: number[][] = [[...tuple]];
    let tried = 0;
    const extend = (chosen: number[]): boolean => {
      if (chosen.length === tuple.length) {
        if (chosen.every((atom, k) => atom === tuple[k])) return true;
        tried += 1;
        if (tried > 20 * most) return false;
        if (this.exchange(tuple, chosen)) found.push([...chosen]);
        return found.length <= most;
      }
      for (const atom of choices[chosen.length]!) {
        if (chosen.includes(atom) || !this.keepsBonds(tuple, chosen, atom)) continue;
        if (!extend([...chosen, atom])) return false;
      }
      return true;
    };
    return extend([]) ? found : null;
  }

  /** Atoms that are bonded in the tuple stay bonded in its image, and others do not become so. */
  private keepsBonds(tuple: readonly number[], chosen: readonly number[], atom: number): boolean {
    const at = tuple[chosen.length]!;
    return chosen.every(
      (other, k) =>
        neighboursOf(this.graph, atom).includes(other) === neighboursOf(this.graph, at).includes(tuple[k]!),
    );
  }

  /**
   * Where each atom of the reference frame stands in another frame: files may number equivalent atoms otherwise, as
   * their hands tell.
   *
   * @returns null where the frame is numbered alike (or its hands fit no exchange, as of another configuration)
   */
  relabelling(positions: ArrayLike<number>, offset = 0): Int32Array | null {
    const signs = this.signsOf(positions, offset);
    const key = signs.join();
    const known = this.known.get(key);
    if (known !== undefined) return known;
    const found = this.findRelabelling(signs);
    this.known.set(key, found);
    return found;
  }

  private findRelabelling(signs: Int8Array): Int32Array | null {
    const fits = (hand: Int8Array) =>
      hand.every((sign, u) => sign === 0 || signs[u] === 0 || sign === signs[u]);
    if (this.hands.some(fits)) return null;
    for (const hand of this.hands) {
      const open = (list: Int8Array) => list.map((sign, u) => (hand[u] === 0 || signs[u] === 0 ? 0 : sign));
      const found = matchParts(
        { graph: this.graph, units: this.units, signs: open(hand) },
        { graph: this.graph, units: this.units, signs: open(signs) },
        { everyAtom: true, workLimit: WORK_LIMIT },
      );
      if (found instanceof Int32Array) return found;
    }
    return null;
  }
}

import { makePlan } from "../align/plan.ts";
import { writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import { atomName } from "../chem/elements.ts";
import type { Graph } from "../structure.ts";
import type { DistanceSettings } from "./distances.ts";

/** Å by which an exchange must beat the atoms as numbered to be named: less is the symmetry of the shape itself. */
const BETTER = 1e-6;
/**
 * Which equivalent atoms had to be exchanged so that one structure lies nearest to another, by the atoms, symmetry and
 * treatment of mirror images of a recipe. Holds the work that all pairs share; not re-entrant.
 *
 * @example new ExchangedAtoms(acid, options).between(first, second) // ["O7 with O8"]
 */
export class ExchangedAtoms {
  private readonly bySymmetry: SymmetricRmsd;
  private readonly byNumber: SymmetricRmsd;
  private readonly shapes: Float64Array;

  constructor(
    private readonly graph: Graph,
    private readonly options: DistanceSettings,
  ) {
    const { atoms, symmetry } = options;
    this.bySymmetry = new SymmetricRmsd(makePlan(graph, atoms, { symmetry }));
    this.byNumber = new SymmetricRmsd(makePlan(graph, atoms, { symmetry: false }));
    this.shapes = new Float64Array(4 * this.bySymmetry.plan.shapeLength);
  }

  /** False where the molecule has no equivalent atoms in the set, or the recipe takes them by number: nothing to say. */
  get possible(): boolean {
    return this.bySymmetry.plan.levels.length > 0;
  }

  /**
   * The exchanges in words, none where the atoms lie best as they are numbered.
   *
   * @param first, second packed x, y, z of all atoms in Å
   */
  between(first: Float64Array, second: Float64Array): string[] {
    const plain = this.distance(this.byNumber, first, second);
    const least = this.distance(this.bySymmetry, first, second);
    if (plain <= least + BETTER) return [];
    return exchangeWords(this.graph.elements, this.bySymmetry.plan.atoms, this.bySymmetry.permutation());
  }

  private distance(comparer: SymmetricRmsd, first: Float64Array, second: Float64Array): number {
    const { plan } = comparer;
    writeShape(plan, first, 0, this.shapes, 0);
    writeShape(plan, second, 0, this.shapes, plan.shapeLength);
    return comparer.minimum(this.shapes, 0, this.shapes, plan.shapeLength, this.options.mirror).rmsd;
  }
}

/**
 * The cycles of an exchange: "O7 with O8", "C2 with C6"; three that turn are "H5 to H6 to H7".
 *
 * @param atoms those that may be named, ascending; hydrogens that only follow their carbons are left out
 * @param permutation atom k of the first lies on atom permutation[k] of the second
 */
export function exchangeWords(
  elements: ArrayLike<number>,
  atoms: ArrayLike<number>,
  permutation: ArrayLike<number>,
): string[] {
  const done = new Set<number>();
  const words: string[] = [];
  for (let k = 0; k < atoms.length; k++) {
    const cycle: string[] = [];
    for (let at = atoms[k]!; !done.has(at); at = permutation[at]!) {
      done.add(at);
      cycle.push(atomName(elements, at));
    }
    if (cycle.length > 1) words.push(cycle.join(cycle.length === 2 ? " with " : " to "));
  }
  return words;
}

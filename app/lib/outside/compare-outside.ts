import { makePlan, type SymmetryPlan } from "../align/plan.ts";
import { writeShape } from "../align/shape.ts";
import { SymmetricRmsd } from "../align/symmetric-rmsd.ts";
import type { StereoUnit } from "../chem/refine.ts";
import { neighboursOf, wayAround } from "../chem/rings.ts";
import { unitSign } from "../chem/stereo.ts";
import { findStereoUnits } from "../chem/stereo-units.ts";
import { torsion, wrapDegrees } from "../measure/geometry.ts";
import { type AtomSet, type FrameBlock, type Graph, makeGraph, selectAtoms } from "../structure.ts";

/** A structure from outside in the atom order of the ensemble. */
export interface Outside {
  /** Packed x, y, z in Å; what stands at atoms that it does not show is not read. */
  positions: Float64Array;
  /** The largest set of atoms that it shows. */
  atoms: AtomSet;
}

export interface Nearness {
  /** Å, the same hand and the mirror image of the conformer; symmetry-corrected. */
  rmsd: Float64Array;
  mirrorRmsd: Float64Array;
  /** 0 where a work bound was met: the two are then bounds from above. */
  exact: Uint8Array;
}

const RANK: Record<AtomSet, number> = { heavy: 0, "heavy+polarH": 1, all: 2 };

/** The smaller of two sets of atoms. */
export function smallerSet(a: AtomSet, b: AtomSet): AtomSet {
  return RANK[a] <= RANK[b] ? a : b;
}

/**
 * Compares conformers with one structure from outside, with the exact least RMSD over equivalent atoms and rotations.
 * Where the structure shows fewer hydrogens than the ensemble, atoms are equivalent that are so without them: it does
 * not tell C=O from C-OH.
 */
export class OutsideComparer {
  readonly plan: SymmetryPlan;
  private readonly comparer: SymmetricRmsd;
  private readonly shape: Float64Array;
  private readonly outside: readonly [Float64Array, Float64Array];

  /** @param atoms wanted; never more than the structure shows */
  constructor(
    private readonly graph: Graph,
    private readonly structure: Outside,
    atoms: AtomSet,
    nodeLimit?: number,
  ) {
    const seen = structure.atoms === "all" ? graph : withoutHidden(graph, structure.atoms);
    this.plan = makePlan(seen, smallerSet(atoms, structure.atoms));
    this.comparer = new SymmetricRmsd(this.plan, nodeLimit);
    this.shape = new Float64Array(this.plan.shapeLength);
    this.outside = [this.shapeOf(structure.positions), this.shapeOf(structure.positions.map((x) => -x))];
  }

  /** Nodes that all comparisons so far have cost. */
  get nodes(): number {
    return this.comparer.nodes;
  }

  /** Nodes that one comparison may cost from now on; where that is met its result is a bound from above. */
  limitNodes(limit: number): void {
    this.comparer.nodeLimit = limit;
  }

  /** RMSDs of all frames of a block. */
  compare(block: FrameBlock): Nearness {
    const found: Nearness = {
      rmsd: new Float64Array(block.count),
      mirrorRmsd: new Float64Array(block.count),
      exact: new Uint8Array(block.count),
    };
    for (let k = 0; k < block.count; k++) {
      writeShape(this.plan, block.positions, 3 * block.atoms * k, this.shape, 0);
      const [same, mirror] = this.outside.map((y) => this.comparer.minimum(this.shape, 0, y, 0));
      found.rmsd[k] = same!.rmsd;
      found.mirrorRmsd[k] = mirror!.rmsd;
      found.exact[k] = same!.exact && mirror!.exact ? 1 : 0;
    }
    return found;
  }

  /**
   * The structure in the atom order in which it lies best on one conformer; for the mirror image the structure is
   * reflected, which leaves the conformer as it is.
   */
  fit(conformer: Float64Array, mirror: boolean): Float64Array {
    writeShape(this.plan, conformer, 0, this.shape, 0);
    this.comparer.minimum(this.shape, 0, this.outside[mirror ? 1 : 0], 0);
    const order = this.comparer.permutation();
    const sign = mirror ? -1 : 1;
    const out = new Float64Array(conformer.length);
    order.forEach((from, atom) => {
      for (let c = 0; c < 3; c++) out[3 * atom + c] = sign * this.structure.positions[3 * from + c]!;
    });
    return out;
  }

  /**
   * Stereocentres and double bonds at which a fitted structure has another configuration than a conformer. A unit with a
   * hydrogen that the structure does not show is judged by its heavy neighbours.
   */
  otherConfiguration(conformer: Float64Array, fitted: Float64Array): number[] {
    const visible = new Set(selectAtoms(this.graph, this.structure.atoms));
    return findStereoUnits(this.graph).flatMap((unit) => {
      const seen = visibleUnit(unit, visible);
      if (seen === null) return [];
      const [own, theirs] = [unitSign(seen, conformer), unitSign(seen, fitted)];
      if (own === 0 || theirs === 0 || own === theirs) return [];
      return [unit.kind === "centre" ? unit.atom : unit.atoms[0]];
    });
  }

  private shapeOf(positions: Float64Array): Float64Array {
    const shape = new Float64Array(this.plan.shapeLength);
    writeShape(this.plan, positions, 0, shape, 0);
    return shape;
  }
}

/** The unit over atoms that are there; null where too few are. Three neighbours tell the hand as four do. */
function visibleUnit(unit: StereoUnit, visible: ReadonlySet<number>): StereoUnit | null {
  if (unit.kind === "double-bond") {
    const sides = unit.sides.map((side) => side.filter((atom) => visible.has(atom)));
    // Another reference neighbour would turn the sign around.
    return sides.every((side, k) => side[0] === unit.sides[k]![0]) ? unit : null;
  }
  const neighbours = unit.neighbours.filter((atom) => visible.has(atom));
  return neighbours.length >= 3 ? { ...unit, neighbours } : null;
}

/** The graph with hydrogens that are not shown as dummies without bonds: they belong to no set and to no exchange. */
function withoutHidden(graph: Graph, atoms: AtomSet): Graph {
  const visible = new Set(selectAtoms(graph, atoms));
  const bonds: number[] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const [a, b] = [graph.bonds[k]!, graph.bonds[k + 1]!];
    if (visible.has(a) && visible.has(b)) bonds.push(a, b);
  }
  const elements = graph.elements.map((z, atom) => (visible.has(atom) ? z : 0));
  return makeGraph(elements, bonds);
}

/**
 * The torsions that make a conformer: one about each bond that lies in no ring and has further heavy atoms at both ends,
 * by its lowest-numbered neighbours. Bonds to atoms of two bonds on one line have none.
 */
export function mainTorsions(graph: Graph): [number, number, number, number][] {
  const heavy = (atom: number, but: number) =>
    [...neighboursOf(graph, atom)].filter((other) => other !== but && graph.elements[other]! > 1);
  const torsions: [number, number, number, number][] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const [b, c] = [graph.bonds[k]!, graph.bonds[k + 1]!];
    if (graph.elements[b]! <= 1 || graph.elements[c]! <= 1) continue;
    const [a] = heavy(b, c);
    const [d] = heavy(c, b);
    if (a === undefined || d === undefined || a === d || wayAround(graph, b, c) < Infinity) continue;
    torsions.push([a, b, c, d]);
  }
  return torsions;
}

export interface TorsionApart {
  atoms: [number, number, number, number];
  /** Degrees; null where three atoms lie on one line. */
  outside: number | null;
  conformer: number | null;
  /** 0 to 180. */
  apart: number | null;
}

/**
 * Torsions of a fitted structure beside those of a conformer.
 *
 * @param fitted from `OutsideComparer.fit`
 * @param mirror the fit reflected the structure: its torsions are given as they are in its file
 */
export function compareTorsions(
  torsions: readonly [number, number, number, number][],
  conformer: Float64Array,
  fitted: Float64Array,
  mirror: boolean,
): TorsionApart[] {
  const sign = mirror ? -1 : 1;
  return torsions.map((atoms) => {
    const theirs = torsion(fitted, ...atoms);
    const own = torsion(conformer, ...atoms);
    return {
      atoms,
      outside: theirs === null ? null : wrapDegrees(sign * theirs),
      conformer: own === null ? null : wrapDegrees(sign * own),
      apart: theirs === null || own === null ? null : Math.abs(wrapDegrees(theirs - own)),
    };
  });
}

import { type Graph, makeGraph } from "../structure.ts";
import { matchParts } from "./matching.ts";
import type { Centre, DoubleBond, StereoUnit } from "./refine.ts";
import { branchOf, degreeOf, inRing, neighboursOf, wayAround } from "./rings.ts";
import { refineColours } from "./signature.ts";

/** A double bond in a ring of fewer atoms can only be cis. */
const SMALLEST_TRANS_RING = 8;
/** Rings in which a bridgehead nitrogen cannot invert. */
const LARGEST_RIGID_RING = 8;

/** Elements whose four-coordinate atoms are tetrahedral and keep their arrangement. */
const tetrahedral = new Set([5, 6, 7, 14, 15, 16, 32, 33, 34, 50, 51, 52]);
/** Elements whose three-coordinate atoms are pyramids that do not invert: P, S and the heavier ones of their groups. */
const pyramidal = new Set([15, 16, 33, 34, 51, 52]);

/**
 * The places of a bonded graph that can have a configuration: centres first, then bonds that may be double, both by
 * rising atom number. Which of the latter are double only lengths can tell (`isDouble`).
 *
 * Centres have four neighbours, or three at S, P (and Se, Te, As, Sb) and at a bridgehead nitrogen. A place where two
 * neighbours can be exchanged freely is none: two branches that are alike, hold no stereo unit themselves and hang on
 * bonds outside rings (CH2, CH3, CF3, SO2, isopropyl). Branches alike in a ring, or with centres of their own, stay.
 * At P and S, oxygens that differ in a hydrogen alone count as alike, for that hydrogen moves.
 *
 * @example findStereoUnits(alanine) // one centre: the alpha carbon
 */
export function findStereoUnits(graph: Graph): StereoUnit[] {
  const colours = refineColours(graph);
  let units: StereoUnit[] = [...centres(graph, colours), ...doubleBonds(graph, colours)];
  for (;;) {
    const held = new Set(units.flatMap((u) => (u.kind === "centre" ? [u.atom] : u.atoms)));
    const left = units.filter((unit) => !exchangesFreely(graph, colours, unit, held));
    if (left.length === units.length) return units;
    units = left;
  }
}

function centres(graph: Graph, colours: Int32Array): Centre[] {
  const found: Centre[] = [];
  for (let atom = 0; atom < graph.elements.length; atom++) {
    const neighbours = neighboursOf(graph, atom);
    if (!canHold(graph, atom) || hasTwins(graph, colours, neighbours)) continue;
    if (isOxoAcid(graph, atom)) continue;
    found.push({ kind: "centre", atom, neighbours: [...neighbours] });
  }
  return found;
}

function canHold(graph: Graph, atom: number): boolean {
  const z = graph.elements[atom]!;
  const degree = degreeOf(graph, atom);
  if (degree === 4) return tetrahedral.has(z);
  if (degree !== 3) return false;
  return pyramidal.has(z) || (z === 7 && isBridgehead(graph, atom));
}

/** Two identical end atoms. */
function hasTwins(graph: Graph, colours: Int32Array, neighbours: ArrayLike<number>): boolean {
  for (let k = 0; k < neighbours.length; k++) {
    for (let m = k + 1; m < neighbours.length; m++) {
      if (colours[neighbours[k]!] === colours[neighbours[m]!] && degreeOf(graph, neighbours[k]!) === 1)
        return true;
    }
  }
  return false;
}

/** P(=O)OH, S(=O)OH and the like: which of two oxygens (or sulfurs) carries the hydrogen is no configuration. */
function isOxoAcid(graph: Graph, atom: number): boolean {
  if (!pyramidal.has(graph.elements[atom]!)) return false;
  const bare = [...neighboursOf(graph, atom)].filter((b) =>
    [...neighboursOf(graph, b)].every((c) => c === atom || graph.elements[c] === 1),
  );
  return [8, 16].some((z) => bare.filter((b) => graph.elements[b] === z).length > 1);
}

/**
 * Nitrogen at the head of a bridge, where inversion would tear the cage: its three bonds lie in rings of at most 8,
 * the rings are bridged, not merely fused side by side (the third ring is then the outline of the other two), and
 * at least one neighbour is in no ring once the nitrogen is taken out.
 */
function isBridgehead(graph: Graph, atom: number): boolean {
  const [a, b, c] = [...neighboursOf(graph, atom)] as [number, number, number];
  const rings = [
    wayAround(graph, a, b, atom) + 2,
    wayAround(graph, b, c, atom) + 2,
    wayAround(graph, a, c, atom) + 2,
  ].sort((x, y) => x - y) as [number, number, number];
  if (rings[2] > LARGEST_RIGID_RING || rings[2] >= rings[0] + rings[1] - 2) return false;
  return [a, b, c].some((x) =>
    [...neighboursOf(graph, x)].every((y) => y === atom || wayAround(graph, x, y, atom) === Infinity),
  );
}

function doubleBonds(graph: Graph, colours: Int32Array): DoubleBond[] {
  const found: DoubleBond[] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const i = graph.bonds[k]!;
    const j = graph.bonds[k + 1]!;
    if (!canEnd(graph, i) || !canEnd(graph, j)) continue;
    if (wayAround(graph, i, j) + 1 < SMALLEST_TRANS_RING) continue;
    const side = (at: number, other: number): number[] =>
      [...neighboursOf(graph, at)].filter((a) => a !== other);
    const sides = [side(i, j), side(j, i)] as const;
    if (sides.some((atoms) => hasTwins(graph, colours, atoms))) continue;
    found.push({ kind: "double-bond", atoms: [i, j], sides });
  }
  return found;
}

/** Three-coordinate carbon, two-coordinate nitrogen (an amide nitrogen has three). */
function canEnd(graph: Graph, atom: number): boolean {
  const z = graph.elements[atom]!;
  return (z === 6 && degreeOf(graph, atom) === 3) || (z === 7 && degreeOf(graph, atom) === 2);
}

function exchangesFreely(graph: Graph, colours: Int32Array, unit: StereoUnit, held: Set<number>): boolean {
  if (unit.kind === "centre") return anyAlike(graph, colours, unit.atom, unit.neighbours, held);
  return unit.sides.some((side, end) => anyAlike(graph, colours, unit.atoms[end === 0 ? 0 : 1], side, held));
}

function anyAlike(
  graph: Graph,
  colours: Int32Array,
  root: number,
  branches: readonly number[],
  held: Set<number>,
): boolean {
  for (let k = 0; k < branches.length; k++) {
    for (let m = k + 1; m < branches.length; m++) {
      const a = branches[k]!;
      const b = branches[m]!;
      if (colours[a] === colours[b] && areFreeAndAlike(graph, root, a, b, held)) return true;
    }
  }
  return false;
}

function areFreeAndAlike(graph: Graph, root: number, a: number, b: number, held: Set<number>): boolean {
  if (inRing(graph, root, a) || inRing(graph, root, b)) return false;
  const one = branchOf(graph, a, root);
  const two = branchOf(graph, b, root);
  if (one.length !== two.length || one.some((x) => held.has(x)) || two.some((x) => held.has(x))) return false;
  return matchParts(rooted(graph, one), rooted(graph, two)) instanceof Int32Array;
}

/** A branch as a graph of its own, its first atom marked. */
function rooted(graph: Graph, branch: readonly number[]): { graph: Graph; colours: Uint8Array } {
  const place = new Map(branch.map((atom, k) => [atom, k]));
  const bonds: number[] = [];
  branch.forEach((atom, k) => {
    for (const b of neighboursOf(graph, atom)) {
      const other = place.get(b);
      if (other !== undefined && other > k) bonds.push(k, other);
    }
  });
  const part = makeGraph(
    Uint8Array.from(branch, (a) => graph.elements[a]!),
    bonds,
    Uint16Array.from(branch, (a) => graph.isotopes[a]!),
  );
  const colours = new Uint8Array(branch.length);
  colours[0] = 1;
  return { graph: part, colours };
}

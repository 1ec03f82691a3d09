import { atomName } from "../chem/elements.ts";
import { degreeOf, neighboursOf } from "../chem/rings.ts";
import { torsion, wrapDegrees } from "../measure/geometry.ts";
import type { Graph } from "../structure.ts";

/** The residue around a coupling H-N-CA-HA; atoms from 0. */
export interface PeptideChain {
  /** Acyl carbon that N carries: C of the residue before. */
  before: number;
  n: number;
  ca: number;
  /** Carbonyl carbon that CA carries. */
  c: number;
  ha: number;
}

/** A carbon with three neighbours, one of them an O or S that carries nothing else. */
function isCarbonyl(graph: Graph, atom: number): boolean {
  if (graph.elements[atom] !== 6 || degreeOf(graph, atom) !== 3) return false;
  return neighboursOf(graph, atom).some(
    (next) => (graph.elements[next] === 8 || graph.elements[next] === 16) && degreeOf(graph, next) === 1,
  );
}

/**
 * The chain C(i-1)-N-CA-C of the residue that a picked H-N-CA-HA (or HA-CA-N-H) belongs to, from the bonds.
 *
 * @returns null where the four atoms are no such path, or the chain is not there or not one only
 * @example peptideChain(alanine, [11, 3, 4, 14]) // { before: 1, n: 3, ca: 4, c: 5, ha: 14 }
 */
export function peptideChain(graph: Graph, path: readonly number[]): PeptideChain | null {
  const forward = graph.elements[path[1] ?? -1] === 7 ? path : [...path].reverse();
  const [h = -1, n = -1, ca = -1, ha = -1] = forward;
  const z = (atom: number) => graph.elements[atom];
  if (z(h) !== 1 || z(n) !== 7 || z(ca) !== 6 || z(ha) !== 1) return null;
  const bonded = (a: number, b: number) => neighboursOf(graph, a).includes(b);
  if (!bonded(h, n) || !bonded(n, ca) || !bonded(ca, ha) || degreeOf(graph, ca) !== 4) return null;
  const carbonyls = (of: number, not: number) =>
    Array.from(neighboursOf(graph, of)).filter((next) => next !== not && isCarbonyl(graph, next));
  const [befores, afters] = [carbonyls(n, ca), carbonyls(ca, n)];
  const [before, c] = [befores[0], afters[0]];
  if (before === undefined || c === undefined || befores.length > 1 || afters.length > 1) return null;
  return { before, n, ca, c, ha };
}

/**
 * The angle t that the published sets of 3J(HN-HA) are for: phi - 60 degrees where HA stands +120 degrees from C seen
 * along N-CA (an L residue), phi + 60 where it stands at -120 (a D residue). For a planar N-H and ideal centres it is the
 * torsion H-N-CA-HA itself; an N-H out of plane moves that torsion, and not phi.
 *
 * @param positions Å, packed
 * @returns degrees; null where the chain lies on one line
 */
export function peptideAngle(positions: ArrayLike<number>, chain: PeptideChain): number | null {
  const { before, n, ca, c, ha } = chain;
  const phi = torsion(positions, before, n, ca, c);
  const side = torsion(positions, before, n, ca, ha);
  if (phi === null || side === null) return null;
  return wrapDegrees(phi + (wrapDegrees(side - phi) > 0 ? -60 : 60));
}

/** "C2–N4–C5–C6": the four atoms of phi. */
export function phiName(elements: ArrayLike<number>, { before, n, ca, c }: PeptideChain): string {
  return [before, n, ca, c].map((atom) => atomName(elements, atom)).join("\u2013");
}

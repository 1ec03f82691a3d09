import { atomName } from "../chem/elements.ts";
import { fragmentsOf } from "../chem/rings.ts";
import type { Graph } from "../structure.ts";

/** What happened to the bonds of a frame, in kinds a chemist would say. */
export type ChangeKind =
  | "proton transfer"
  | "dissociation"
  | "association"
  | "ring closure"
  | "ring opening"
  | "other bonds";

export interface BondChange {
  kind: ChangeKind;
  /** "H12 has moved from O9 to N3, bond C4–O9 is gone" */
  words: string;
  /** Number of bonds that are gone and of those that are new. */
  broken: number;
  formed: number;
}

/** So many changes are named; the rest is counted. */
const NAMED = 4;

/**
 * Compares the bonds of a frame with those of its group, atom by atom.
 *
 * @param stretched distance of a pair as a multiple of the summed radii where it is just beyond a bond, else null
 * @example describeChange(glycine, zwitterion).words // "H5 has moved from O3 to N1"
 */
export function describeChange(
  group: Graph,
  frame: Graph,
  stretched: (i: number, j: number) => number | null = () => null,
): BondChange {
  const broken = missingIn(group, frame);
  const formed = missingIn(frame, group);
  const counts = { broken: broken.length, formed: formed.length };
  const moves = takeMoves(group, broken, formed);
  const name = (atom: number): string => atomName(group.elements, atom);
  const words = [
    ...moves.map(({ h, from, to }) => `${name(h)} has moved from ${name(from)} to ${name(to)}`),
    ...broken.map(([i, j]) => {
      const ratio = stretched(i, j);
      const beyond = ratio === null ? "" : ` (${ratio.toFixed(2)} of the summed radii)`;
      return `bond ${name(i)}–${name(j)} is gone${beyond}`;
    }),
    ...formed.map(([i, j]) => `bond ${name(i)}–${name(j)} is new`),
  ];
  const rest = words.length - NAMED;
  const text = words.slice(0, NAMED).join(", ") + (rest > 0 ? ` and ${rest} more changes` : "");
  return { kind: kindOf(group, frame, moves.length), words: text, ...counts };
}

function kindOf(group: Graph, frame: Graph, moves: number): ChangeKind {
  const pieces = pieceCount(frame) - pieceCount(group);
  const bonds = (frame.bonds.length - group.bonds.length) / 2;
  if (pieces > 0) return "dissociation";
  if (pieces < 0) return "association";
  if (moves > 0) return "proton transfer";
  if (bonds > 0) return "ring closure";
  if (bonds < 0) return "ring opening";
  return "other bonds";
}

function pieceCount(graph: Graph): number {
  return Math.max(-1, ...fragmentsOf(graph)) + 1;
}

function missingIn(graph: Graph, other: Graph): [number, number][] {
  const n = graph.elements.length;
  const there = new Set<number>();
  for (let k = 0; k < other.bonds.length; k += 2) there.add(other.bonds[k]! * n + other.bonds[k + 1]!);
  const missing: [number, number][] = [];
  for (let k = 0; k < graph.bonds.length; k += 2) {
    const i = graph.bonds[k]!;
    const j = graph.bonds[k + 1]!;
    if (!there.has(i * n + j)) missing.push([i, j]);
  }
  return missing;
}

/** Hydrogens that lost one bond and made one; their pairs are taken out of the two lists. */
function takeMoves(
  graph: Graph,
  broken: [number, number][],
  formed: [number, number][],
): { h: number; from: number; to: number }[] {
  const moves: { h: number; from: number; to: number }[] = [];
  for (const h of new Set(broken.flat())) {
    if (graph.elements[h] !== 1) continue;
    const lost = broken.filter((pair) => pair.includes(h));
    const made = formed.filter((pair) => pair.includes(h));
    if (lost.length !== 1 || made.length !== 1) continue;
    const other = ([i, j]: [number, number]): number => (i === h ? j : i);
    moves.push({ h, from: other(lost[0]!), to: other(made[0]!) });
    broken.splice(broken.indexOf(lost[0]!), 1);
    formed.splice(formed.indexOf(made[0]!), 1);
  }
  return moves.sort((a, b) => a.h - b.h);
}

import { inWords } from "../chem/chirality.ts";
import { atomName } from "../chem/elements.ts";
import type { DoubleBond, StereoUnit } from "../chem/refine.ts";
import type { Graph } from "../structure.ts";

/**
 * The difference of a frame's configuration from the group's, in words.
 *
 * @param different indices of the units to name; `signs` are the frame's, `reference` the group's
 * @param mirror the frame is the mirror image of the group as a whole
 * @example configurationWords(graph, units, [0], [-1], [1], true) // "C7 is inverted: the mirror image."
 */
export function configurationWords(
  graph: Graph,
  units: readonly StereoUnit[],
  different: readonly number[],
  signs: ArrayLike<number>,
  mirror: boolean,
): string {
  const centres = different.flatMap((u) => {
    const unit = units[u]!;
    return unit.kind === "centre" ? [atomName(graph.elements, unit.atom)] : [];
  });
  const parts: string[] = [];
  if (centres.length > 0) {
    const verb = centres.length > 1 ? "are" : "is";
    parts.push(`${inWords(centres)} ${verb} inverted${mirror ? ": the mirror image" : ""}`);
  }
  for (const u of different) {
    const unit = units[u]!;
    if (unit.kind === "double-bond") parts.push(doubleBondWords(graph, unit, signs[u]!));
  }
  return asSentence(parts.join("; "));
}

const asSentence = (text: string) => `${text.slice(0, 1).toUpperCase()}${text.slice(1)}.`;

/** So many atoms are named of which any one may be the inverted one. */
const MOST_ALTERNATIVES = 4;

/**
 * The difference of a configuration from the group's where equivalent atoms leave open which of them are turned.
 *
 * @param sets units that may be turned, each set with the signs that the group then has; at least one
 * @example differenceWords(graph, units, [{ set: [0], turned }, { set: [1], turned: other }]) // "C1 or C2 is inverted."
 */
export function differenceWords(
  graph: Graph,
  units: readonly StereoUnit[],
  sets: readonly { set: readonly number[]; turned: ArrayLike<number> }[],
): string {
  const [first] = sets;
  if (first === undefined) return "";
  const alone = configurationWords(graph, units, first.set, first.turned, false);
  if (sets.length === 1) return alone;
  const single = sets.flatMap(({ set }) => {
    const unit = set.length === 1 ? units[set[0]!] : undefined;
    return unit?.kind === "centre" ? [atomName(graph.elements, unit.atom)] : [];
  });
  if (single.length < sets.length || sets.length > MOST_ALTERNATIVES) {
    return `${alone.replace(/\.$/, "")}, or the same at equivalent atoms.`;
  }
  return `${single.slice(0, -1).join(", ")} or ${single.at(-1)} is inverted.`;
}

/**
 * How a unit is arranged, by the rules of Cahn, Ingold and Prelog, where the atoms next to it decide: R or S of a centre, E
 * or Z of a double bond. Null where ranking would need more than these atoms.
 *
 * @param sign of the unit in the numbering of its atoms, never 0
 * @example arrangementWords(graph, unit, -1) // "C1 is R"
 */
export function arrangementWords(graph: Graph, unit: StereoUnit, sign: number): string | null {
  if (unit.kind === "double-bond") {
    const { turned, sure } = ranked(graph, unit, sign);
    return sure ? `${bondName(graph, unit)} is ${turned > 0 ? "Z" : "E"}` : null;
  }
  const { neighbours } = unit;
  const places = neighbours
    .map((_, k) => k)
    .sort((a, b) => rankOf(graph, neighbours[b]!) - rankOf(graph, neighbours[a]!));
  const ranks = new Set(neighbours.map((atom) => rankOf(graph, atom)));
  if (ranks.size < neighbours.length) return null;
  // Seen with the lowest (or the lone pair) behind, the others in falling order run clockwise where their triple product
  // is negative.
  return `${atomName(graph.elements, unit.atom)} is ${sign * parity(places) < 0 ? "R" : "S"}`;
}

/** Atomic number first, then mass; an unmarked isotope ranks as the common one. */
function rankOf({ elements, isotopes }: Graph, atom: number): number {
  return elements[atom]! * 1000 + isotopes[atom]!;
}

/** +1 for an even permutation, -1 for an odd one. */
function parity(places: readonly number[]): number {
  let sign = 1;
  for (let i = 0; i < places.length; i++)
    for (let j = i + 1; j < places.length; j++) if (places[i]! > places[j]!) sign = -sign;
  return sign;
}

/** What cannot be told of a frame: flat centres and twisted double bonds. */
export function undefinedWords(graph: Graph, units: readonly StereoUnit[], open: readonly number[]): string {
  const parts = open.map((u) => {
    const unit = units[u]!;
    if (unit.kind === "centre") return `${atomName(graph.elements, unit.atom)} is nearly flat`;
    return `${bondName(graph, unit)} is twisted between cis and trans`;
  });
  return `${inWords(parts)}: the configuration there cannot be told.`;
}

/** E and Z where the atoms next to the bond decide it (Cahn, Ingold, Prelog, Angew. Chem. Int. Ed. 1966, 5, 385). */
function doubleBondWords(graph: Graph, unit: DoubleBond, sign: number): string {
  const { ends, turned, sure } = ranked(graph, unit, sign);
  const bond = `the double bond ${bondName(graph, unit)}`;
  if (sure) {
    return turned > 0 ? `${bond} is Z, elsewhere E` : `${bond} is E, elsewhere Z`;
  }
  const [a, b] = ends.map((end) => atomName(graph.elements, end.atom));
  const words = turned > 0 ? ["cis", "trans"] : ["trans", "cis"];
  return `at ${bond} ${a} and ${b} are ${words[0]}, elsewhere ${words[1]}`;
}

/** The higher neighbour at each end, and the sign between these two. */
function ranked(
  graph: Graph,
  unit: DoubleBond,
  sign: number,
): { ends: Ranked[]; turned: number; sure: boolean } {
  const ends = unit.sides.map((side) => higher(graph, side));
  // The sign speaks of the lowest-numbered neighbours; each end that ranks the other one turns it.
  const turned = ends.reduce((s, end, k) => (end.atom === unit.sides[k]![0] ? s : -s), sign);
  return { ends, turned, sure: ends.every((end) => end.sure) };
}

interface Ranked {
  atom: number;
  /** The first atoms decide; otherwise ranking would need bond orders. */
  sure: boolean;
}

function higher(graph: Graph, side: readonly number[]): Ranked {
  const [a, b] = side as [number, number | undefined];
  if (b === undefined) return { atom: a, sure: true };
  const difference = graph.elements[a]! - graph.elements[b]! || graph.isotopes[a]! - graph.isotopes[b]!;
  return { atom: difference >= 0 ? a : b, sure: difference !== 0 };
}

function bondName(graph: Graph, unit: DoubleBond): string {
  return unit.atoms.map((a) => atomName(graph.elements, a)).join("=");
}

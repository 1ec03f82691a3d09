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
  const text = parts.join("; ");
  return `${text.slice(0, 1).toUpperCase()}${text.slice(1)}.`;
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
  const ends = unit.sides.map((side) => higher(graph, side)) as [Ranked, Ranked];
  // The sign speaks of the lowest-numbered neighbours; each end that ranks the other one turns it.
  const turned = ends.reduce((s, end, k) => (end.atom === unit.sides[k]![0] ? s : -s), sign);
  const bond = `the double bond ${bondName(graph, unit)}`;
  if (ends.every((end) => end.sure)) {
    return turned > 0 ? `${bond} is Z, elsewhere E` : `${bond} is E, elsewhere Z`;
  }
  const [a, b] = ends.map((end) => atomName(graph.elements, end.atom));
  const words = turned > 0 ? ["cis", "trans"] : ["trans", "cis"];
  return `at ${bond} ${a} and ${b} are ${words[0]}, elsewhere ${words[1]}`;
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

import type { Graph } from "../structure.ts";
import { atomName } from "./elements.ts";
import type { Centre, StereoUnit } from "./refine.ts";
import { type Configuration, ConfigurationComparer, FLAT, fromConfiguration, unitValue } from "./stereo.ts";

export interface Chirality {
  /** "unsure" is treated as chiral. */
  chirality: "achiral" | "chiral" | "unsure";
  /** Why, in words for chemists. */
  note: string;
}

/**
 * Whether a molecule of the given configuration is its own mirror image, by its centres alone: achiral when it has
 * none, or when some exchange of equivalent atoms carries each centre to one of opposite hand (double bonds kept).
 * Axial, planar and helical chirality are not seen. Unsure when a centre is flat (|chi| < 0.10) in the lowest frame.
 *
 * @param lowest coordinates of the lowest frame in Å, packed; `offset` is the index of its first number
 * @example perceiveChirality(lactate, configuration) // { chirality: "chiral", note: "One stereocentre, C2." }
 */
export function perceiveChirality(
  graph: Graph,
  configuration: Configuration,
  lowest?: { positions: ArrayLike<number>; offset?: number },
): Chirality {
  const { units, signs } = fromConfiguration(graph, configuration);
  const comparer = new ConfigurationComparer(graph, units);
  const counting = units.flatMap((_, u) => (counts(comparer, units, signs, u) ? [u] : []));
  if (counting.length === 0) return { chirality: "achiral", note: "No stereocentre." };
  const centres = counting.map((u) => units[u] as Centre);
  const flat = centres.find((centre) => isFlat(centre, signs[units.indexOf(centre)]!, lowest));
  if (flat) {
    const where = lowest ? " in the lowest frame" : "";
    return {
      chirality: "unsure",
      note: `${atomName(graph.elements, flat.atom)} is nearly flat${where}: taken as chiral.`,
    };
  }
  const mirrored = signs.map((sign, u) => (units[u]!.kind === "centre" ? -sign : sign));
  const mapping = comparer.mapping(signs, mirrored);
  const names = (atoms: readonly number[]): string =>
    inWords(atoms.map((atom) => atomName(graph.elements, atom)));
  if (mapping) return { chirality: "achiral", note: mesoNote(centres, mapping, names) };
  const atoms = centres.map((centre) => centre.atom);
  const note =
    atoms.length === 1
      ? `One stereocentre, ${names(atoms)}.`
      : `${atoms.length} stereocentres: ${names(atoms)}.`;
  return { chirality: "chiral", note };
}

/** A centre counts unless turning it alone gives the same configuration (a ring carbon between two equal halves). */
function counts(
  comparer: ConfigurationComparer,
  units: readonly StereoUnit[],
  signs: Int8Array,
  u: number,
): boolean {
  if (units[u]!.kind !== "centre") return false;
  const known = signs.slice();
  if (known[u] === 0) known[u] = 1;
  const turned = known.slice();
  turned[u] = -turned[u]!;
  return !comparer.same(known, turned);
}

function isFlat(
  centre: Centre,
  sign: number,
  lowest: { positions: ArrayLike<number>; offset?: number } | undefined,
): boolean {
  if (!lowest) return sign === 0;
  return Math.abs(unitValue(centre, lowest.positions, lowest.offset)) < FLAT;
}

/** Centres that change places under the mirror make the molecule meso; those that stay lie on its plane. */
function mesoNote(
  centres: readonly Centre[],
  mapping: Int32Array,
  names: (atoms: readonly number[]) => string,
): string {
  const left = new Set(centres.map((centre) => centre.atom));
  const onPlane = [...left].filter((atom) => mapping[atom] === atom);
  for (const atom of onPlane) left.delete(atom);
  const parts: string[] = [];
  while (left.size > 0) {
    const cycle: number[] = [];
    for (let atom = Math.min(...left); left.delete(atom); atom = mapping[atom]!) cycle.push(atom);
    parts.push(`${names(cycle.sort((a, b) => a - b))} mirror each other`);
  }
  const word = parts.length > 0 ? "Meso" : "Achiral";
  if (onPlane.length > 0)
    parts.push(`${names(onPlane)} ${onPlane.length > 1 ? "lie" : "lies"} on a mirror plane`);
  return `${word}: ${parts.join("; ")}.`;
}

/** "C1", "C1 and C2", "C1, C2 and C3"; beyond eight the rest is counted. */
export function inWords(names: readonly string[]): string {
  if (names.length > 8) return `${names.slice(0, 7).join(", ")} and ${names.length - 7} more`;
  if (names.length < 2) return names.join("");
  return `${names.slice(0, -1).join(", ")} and ${names[names.length - 1]}`;
}

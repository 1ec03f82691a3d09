import { COVALENT_RADII, symbolOf } from "../chem/elements.ts";
import { AS_PROPOSED, type OpenReading, type ReadingChoices } from "../intake/reading-choices.ts";
import { BOHR_ANGSTROM } from "../units.ts";

/** A name in capitals with its two readings; the one-letter one was taken so far. */
export interface OpenCapitals {
  readonly atom: number;
  readonly two: number;
  readonly one: number;
  readonly token: string;
}

/** Distance to the nearest other atom, and which it is; null for a lone atom. */
function nearest(positions: Float64Array, atom: number): { other: number; distance: number } | null {
  let best: { other: number; distance: number } | null = null;
  for (let other = 0; 3 * other < positions.length; other++) {
    if (other === atom) continue;
    const distance = Math.hypot(
      positions[3 * atom]! - positions[3 * other]!,
      positions[3 * atom + 1]! - positions[3 * other + 1]!,
      positions[3 * atom + 2]! - positions[3 * other + 2]!,
    );
    if (best === null || distance < best.distance) best = { other, distance };
  }
  return best;
}

/** A bond's length as a multiple of the summed radii lies about 1. */
const fits = (distance: number, a: number, b: number) => {
  const ratio = distance / (COVALENT_RADII[a]! + COVALENT_RADII[b]!);
  return ratio > 0.75 && ratio < 1.25;
};

/**
 * Which reading the bond lengths speak for: "calcium" 1.5 Å from carbon is carbon. Labels where both fit.
 */
export function proposeCapitals(
  capitals: readonly OpenCapitals[],
  elements: Uint8Array,
  positions: Float64Array,
): "label" | "element" {
  let labels = 0;
  let symbols = 0;
  for (const { atom, two, one } of capitals) {
    const near = nearest(positions, atom);
    if (!near) continue;
    if (fits(near.distance, one, elements[near.other]!)) labels += 1;
    if (fits(near.distance, two, elements[near.other]!)) symbols += 1;
  }
  return symbols > labels ? "element" : "label";
}

/** What is open of names in capitals, for the question. */
export function openCapitals(
  capitals: readonly OpenCapitals[],
  proposed: "label" | "element",
  line: number,
): OpenReading {
  const { token, one, two } = capitals[0]!;
  const shown = {
    label: `${token} is ${symbolOf(one)}`,
    element: `${token} is ${symbolOf(two)}`,
    hold: token,
  };
  return { ask: "capitals", proposed, line, shown };
}

/** How lengths are read where a frame names bohr, or looks like it. */
export interface ReadLengths {
  /** Converted from bohr. */
  bohr: boolean;
  /** Still to be asked. */
  open: OpenReading | null;
  held: boolean;
}

/**
 * @param looks the distances look like bohr; else only a word says so
 */
export function readLengths(
  looks: boolean,
  choices: ReadingChoices,
  positions: Float64Array,
  line: number,
): ReadLengths {
  const choice = choices.lengths;
  if (choice === "bohr" || choice === "angstrom") return { bohr: choice === "bohr", open: null, held: false };
  if (choice !== AS_PROPOSED) return { bohr: false, open: null, held: true };
  const shortest = nearest(positions, 0)?.distance ?? 0;
  const shown = {
    bohr: `${(shortest * BOHR_ANGSTROM).toFixed(2)} Å`,
    angstrom: `${shortest.toFixed(2)} Å`,
    hold: "held",
  };
  return {
    bohr: looks,
    open: { ask: "lengths", proposed: looks ? "bohr" : "angstrom", line, shown },
    held: false,
  };
}

/** Converts coordinates from bohr to Å in place. */
export function fromBohr(positions: Float64Array): void {
  for (let k = 0; k < positions.length; k++) positions[k]! *= BOHR_ANGSTROM;
}

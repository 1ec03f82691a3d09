import { atomName } from "../chem/elements.ts";
import { formatAngle, formatDistance, withUnit } from "../format.ts";
import { angle, distance, torsion } from "./geometry.ts";

/** What a pick of atoms measures: two a distance, three an angle, four a torsion; fewer nothing. */
export type MeasureKind = "distance" | "angle" | "torsion";

export const MEASURE_UNIT: Record<MeasureKind, "Å" | "°"> = { distance: "Å", angle: "°", torsion: "°" };

export function measureKind(atoms: ArrayLike<number>): MeasureKind | null {
  if (atoms.length === 2) return "distance";
  if (atoms.length === 3) return "angle";
  return atoms.length === 4 ? "torsion" : null;
}

/**
 * The quantity that two, three or four picked atoms have in one structure: Å or degrees.
 *
 * @returns null for another number of atoms and where the quantity is undefined (atoms on one line)
 * @throws RangeError on an atom that the structure does not have
 */
export function measureValue(positions: ArrayLike<number>, atoms: readonly number[]): number | null {
  const [i, j, k, l] = atoms;
  if (i === undefined || j === undefined || atoms.length > 4) return null;
  if (k === undefined) return distance(positions, i, j);
  return l === undefined ? angle(positions, i, j, k) : torsion(positions, i, j, k, l);
}

/**
 * Names of the picked atoms joined by en dashes, counted from 1 as in the file.
 *
 * @example measureLabel([6, 6, 6, 6, 7, 16], [2, 3, 4, 5]) // "C3–C4–N5–S6"
 */
export function measureLabel(elements: ArrayLike<number>, atoms: readonly number[]): string {
  return atoms.map((atom) => atomName(elements, atom)).join("\u2013");
}

/**
 * A measured value with its unit as people read it: distances 2 decimals, angles and torsions whole degrees.
 *
 * @example formatMeasure("torsion", -153.8) // "−154°"
 */
export function formatMeasure(kind: MeasureKind, value: number | null): string {
  if (value === null) return "undefined";
  return kind === "distance" ? withUnit(formatDistance(value), "Å") : withUnit(formatAngle(value), "°");
}

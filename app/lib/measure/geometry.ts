/**
 * Distances, angles and torsions of one structure. Positions are packed x, y, z in Å; atoms count from 0.
 * Formulas are textbook vector algebra; torsions by atan2 (never acos, which loses all digits near 0° and 180°),
 * with the sign of the IUPAC rule: positive when, seen along j to k, the far bond stands clockwise of the near one.
 */

/** Below this sine three atoms count as one line: a torsion about them, or an angle at coinciding atoms, means nothing. */
const COLLINEAR_SINE = 1e-6;
/** Å; closer atoms coincide. */
const COINCIDENT = 1e-9;
const DEG_PER_RAD = 180 / Math.PI;

/**
 * Distance of two atoms, Å.
 *
 * @example distance(Float64Array.of(0, 0, 0, 3, 4, 0), 0, 1) // 5
 */
export function distance(positions: ArrayLike<number>, i: number, j: number): number {
  check(positions, i, j);
  return Math.hypot(
    positions[3 * j]! - positions[3 * i]!,
    positions[3 * j + 1]! - positions[3 * i + 1]!,
    positions[3 * j + 2]! - positions[3 * i + 2]!,
  );
}

/**
 * Angle i-j-k at j, 0 to 180°.
 *
 * @returns null where j coincides with i or k
 * @example angle(Float64Array.of(1, 0, 0, 0, 0, 0, 0, 1, 0), 0, 1, 2) // 90
 */
export function angle(positions: ArrayLike<number>, i: number, j: number, k: number): number | null {
  check(positions, i, j, k);
  const a = difference(positions, j, i);
  const b = difference(positions, j, k);
  if (length(a) < COINCIDENT || length(b) < COINCIDENT) return null;
  return Math.atan2(length(cross(a, b)), dot(a, b)) * DEG_PER_RAD;
}

/**
 * Torsion i-j-k-l about the bond j-k, in (-180, 180]°.
 *
 * @returns null where i-j-k or j-k-l lie on one line, or two neighbours coincide: no plane, no torsion
 * @example torsion(Float64Array.of(1, 0, 0, 0, 0, 0, 0, 0, 1, 0, 1, 1), 0, 1, 2, 3) // 90
 */
export function torsion(
  positions: ArrayLike<number>,
  i: number,
  j: number,
  k: number,
  l: number,
): number | null {
  check(positions, i, j, k, l);
  const b1 = difference(positions, i, j);
  const b2 = difference(positions, j, k);
  const b3 = difference(positions, k, l);
  const lengths = [length(b1), length(b2), length(b3)] as const;
  if (lengths[0] < COINCIDENT || lengths[1] < COINCIDENT || lengths[2] < COINCIDENT) return null;
  const n1 = cross(b1, b2);
  const n2 = cross(b2, b3);
  if (length(n1) < COLLINEAR_SINE * lengths[0] * lengths[1]) return null;
  if (length(n2) < COLLINEAR_SINE * lengths[1] * lengths[2]) return null;
  return wrapDegrees(Math.atan2(lengths[1] * dot(b1, n2), dot(n1, n2)) * DEG_PER_RAD);
}

/**
 * An angle or a difference of angles brought into (-180, 180]°.
 *
 * @example wrapDegrees(190) // -170
 */
export function wrapDegrees(degrees: number): number {
  const turned = degrees % 360;
  if (turned > 180) return turned - 360;
  // Adding 0 turns -0 into 0, so that no figure is ever written with a stray minus.
  return (turned <= -180 ? turned + 360 : turned) + 0;
}

type Vector = readonly [number, number, number];

function difference(p: ArrayLike<number>, from: number, to: number): Vector {
  return [p[3 * to]! - p[3 * from]!, p[3 * to + 1]! - p[3 * from + 1]!, p[3 * to + 2]! - p[3 * from + 2]!];
}

function cross(a: Vector, b: Vector): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function length(a: Vector): number {
  return Math.hypot(a[0], a[1], a[2]);
}

function check(positions: ArrayLike<number>, ...atoms: number[]): void {
  const count = Math.floor(positions.length / 3);
  for (const atom of atoms) {
    if (!Number.isInteger(atom) || atom < 0 || atom >= count) {
      throw new RangeError(`The structure has ${count} atoms, found atom index ${atom}.`);
    }
  }
}

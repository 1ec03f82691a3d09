import { columnUnit } from "../csv/column-unit.ts";

/** What one turn is in each unit of angle that columns may be in. */
const TURNS: Readonly<Record<string, number>> = { "°": 360, rad: 2 * Math.PI, mrad: 2000 * Math.PI };

/** One turn of an angle whose unit nobody has said: degrees. */
export const DEGREES_A_TURN = 360;

/**
 * One turn in a unit of angle: the one place that says how the numbers of a column go round.
 *
 * @returns null for any other unit, and where there is none
 * @example turnOf("deg") // 360; turnOf("rad") // 6.283185...; turnOf("Å") // null
 */
export function turnOf(unit: string | null): number | null {
  const known = unit === null ? null : columnUnit(unit);
  return known?.family === "angle" ? (TURNS[known.unit] ?? null) : null;
}

/** Nearer to 1 than this a resultant has lost too many digits to tell how far directions lie apart. */
const SHARP = 1e-9;

/**
 * Circular standard deviation sqrt(-2 ln R) in radians. Where R is 1 within rounding, 1 - R is taken as the mean of
 * 2 sin^2(half the distance from the mean direction): from R itself the logarithm would make a visible angle of a rounding.
 *
 * @param shortOf the mean of 2 sin^2, asked only there
 * @returns null at R = 0
 * @example circularDeviation(0.95, () => 0.05) // 0.3203
 */
export function circularDeviation(resultant: number, shortOf: () => number): number | null {
  if (!(resultant > 0)) return null;
  const log = resultant > 1 - SHARP ? Math.log1p(-shortOf()) : Math.log(resultant);
  return Math.sqrt(Math.max(0, -2 * log));
}

/**
 * A value in (-turn/2, turn/2].
 *
 * @example wrapTurn(190, 360) // -170; wrapTurn(-180, 360) // 180
 */
export function wrapTurn(value: number, turn: number): number {
  const turned = value % turn;
  if (turned > turn / 2) return turned - turn;
  // Adding 0 turns -0 into 0, so that no figure is ever written with a stray minus.
  return (turned <= -turn / 2 ? turned + turn : turned) + 0;
}

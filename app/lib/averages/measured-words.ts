import { fixed, plural, withUnit } from "../format.ts";
import { type Agreement, FEWEST_FOR_CORRECTION, FEWEST_FOR_SCALING, type Line } from "./shielding-fit.ts";

/** What words need of an agreement; editions keep no more. */
export type AgreementFigures = Pick<Agreement, "n" | "mad" | "rmsd" | "max" | "corrected">;

/**
 * How well the values of one nucleus meet the measured ones. A line that was fitted to these very values has slope 1
 * against them: there is nothing to take out.
 *
 * @example agreementWords(agreement, "ppm", "C4", false) // "9 values: mean absolute error 1.20 ppm, ..."
 */
export function agreementWords(
  agreement: AgreementFigures | null,
  unit: string | null,
  farthest: string,
  fitted: boolean,
): string {
  if (agreement === null) return "Nothing measured yet.";
  const { n, corrected } = agreement;
  const errors = errorWords(agreement, unit, farthest);
  if (fitted)
    return `${errors} The line is fitted to these very values, so that the corrected MAE is the same.`;
  if (corrected === null) {
    return n < FEWEST_FOR_CORRECTION
      ? `${errors} From ${FEWEST_FOR_CORRECTION} values on they are corrected by their line against the measured ones too.`
      : errors;
  }
  return `${errors} ${lineWords(corrected, unit)}`;
}

/**
 * The same of properties of the whole molecule in one unit.
 *
 * @example unitWords(agreement, "Hz", "3J") // "1 value, off by 0.36 Hz."
 */
export function unitWords(agreement: AgreementFigures, unit: string, farthest: string): string {
  if (agreement.n === 1) return `1 value, off by ${withUnit(fixed(agreement.max, 2), unit)}.`;
  const errors = errorWords(agreement, unit, farthest);
  return agreement.corrected === null ? errors : `${errors} ${lineWords(agreement.corrected, unit)}`;
}

function errorWords({ n, mad, rmsd, max }: AgreementFigures, unit: string | null, farthest: string): string {
  const of = (value: number) => withUnit(fixed(value, 2), unit ?? "");
  return `${plural(n, "value")}: mean absolute error (MAE) ${of(mad)}, root mean square error (RMSE) ${of(rmsd)}, largest ${of(max)} at ${farthest}.`;
}

function lineWords({ line, mad }: NonNullable<AgreementFigures["corrected"]>, unit: string | null): string {
  const of = (value: number) => withUnit(fixed(value, 2), unit ?? "");
  return `Against the measured values they run with slope m ${fixed(line.slope, 3)} and intercept b ${of(line.intercept)} (n ${line.n}); mapped back by that line the corrected MAE is ${of(mad)}.`;
}

/** The line that scales the shieldings of a nucleus to shifts. */
export function scalingWords(line: (Line & { from: "fitted" | "typed" }) | null): string {
  if (line === null) {
    return `No line yet: measure ${FEWEST_FOR_SCALING} shifts of this nucleus, or type in slope and intercept.`;
  }
  const figures = `slope ${fixed(line.slope, 4)}, intercept ${withUnit(fixed(line.intercept, 2), "ppm")}`;
  return line.from === "typed"
    ? `Line as typed in: ${figures}.`
    : `Line fitted to ${plural(line.n, "measured shift")}: ${figures}.`;
}

/** Which assignment of a pair was chosen, and whether the other would come closer. */
export function assignmentWords(
  names: string,
  pair: { swapped: boolean; entered: { pairMad: number }; exchanged: { pairMad: number } },
  unit: string | null,
): string {
  const of = (value: number) => withUnit(fixed(value, 2), unit ?? "");
  const [chosen, other] = pair.swapped
    ? [pair.exchanged.pairMad, pair.entered.pairMad]
    : [pair.entered.pairMad, pair.exchanged.pairMad];
  const how = pair.swapped ? "swapped" : "as entered";
  const against = pair.swapped ? "as entered" : "swapped";
  return `${names}: assigned ${how} (mean error of the two ${of(chosen)}; ${against} ${of(other)}).`;
}

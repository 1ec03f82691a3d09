import { formatCount, formatRmsd, withUnit } from "../format.ts";
import type { ToleranceCounts } from "../sift/count-against-tolerance.ts";

/** A tolerance and what a sift keeps there. */
export interface CountedTolerance {
  tolerance: number;
  count: number;
}

export interface Plateau {
  from: number;
  to: number;
  count: number;
}

/**
 * The counts at the energy tolerance of the recipe in rising order, with the tolerance at hand among them.
 *
 * @param here what is kept at the tolerance at hand; null while it is not known
 */
export function countedTolerances(
  counts: ToleranceCounts,
  here: CountedTolerance | null,
): CountedTolerance[] {
  const at = counts.energyFactors.indexOf(1);
  const line = counts.counts[Math.max(at, 0)] ?? [];
  const points = counts.rmsdTolerances
    .map((tolerance, t) => ({ tolerance, count: line[t] ?? 0 }))
    .filter(({ tolerance }) => tolerance !== here?.tolerance);
  if (here !== null) points.push(here);
  return points.sort((a, b) => a.tolerance - b.tolerance);
}

/**
 * The run of counted tolerances around the one at hand that all keep as many; null where it stands alone.
 *
 * @example plateauAround(points, 0.25) // { from: 0.02, to: 0.4, count: 31 }
 */
export function plateauAround(points: readonly CountedTolerance[], tolerance: number): Plateau | null {
  const at = points.findIndex((point) => point.tolerance === tolerance);
  const here = points[at];
  if (!here) return null;
  let from = at;
  while (from > 0 && points[from - 1]?.count === here.count) from -= 1;
  let to = at;
  while (to + 1 < points.length && points[to + 1]?.count === here.count) to += 1;
  const [first, last] = [points[from], points[to]];
  if (from === to || !first || !last) return null;
  return { from: first.tolerance, to: last.tolerance, count: here.count };
}

/** What the counts around the tolerance at hand say about the choice, as a sentence; null while they are not known. */
export function plateauSentence(points: readonly CountedTolerance[], tolerance: number): string | null {
  const at = points.findIndex((point) => point.tolerance === tolerance);
  const here = points[at];
  if (!here || points.length < 2) return null;
  const plateau = plateauAround(points, tolerance);
  if (plateau !== null) {
    return `The count stays at ${formatCount(here.count)} at every tolerance counted from ${toleranceText(plateau.from)} to ${withUnit(toleranceText(plateau.to), "Å")}, so it does not hang on the choice there.`;
  }
  const [before, after] = [points[at - 1], points[at + 1]];
  const words = [before, after].flatMap((point) =>
    point ? [`${formatCount(point.count)} at ${withUnit(toleranceText(point.tolerance), "Å")}`] : [],
  );
  return `The count hangs on the tolerance here: ${words.join(" and ")}. Look at the pairs nearest to the cut before you rely on it.`;
}

/**
 * An RMSD tolerance in Å with two decimals, three where it has them.
 *
 * @example toleranceText(0.4) // "0.40"; toleranceText(0.125) // "0.125"
 */
export function toleranceText(tolerance: number): string {
  return formatRmsd(tolerance).replace(/0$/, "");
}

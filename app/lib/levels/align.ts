import { mean } from "../stats/moments.ts";
import { median } from "../stats/quantile.ts";

/** Where the zero of energy of two levels is put: the offset that makes d = level - reference. */
export const ALIGNMENTS = ["own-minimum", "common", "least-squares", "median"] as const;
export type Alignment = (typeof ALIGNMENTS)[number];

/** Place of the lowest value; the first of equal ones. -1 for an empty list. */
export function lowestPlace(values: ArrayLike<number>): number {
  let best = values.length === 0 ? -1 : 0;
  for (let i = 1; i < values.length; i++) if (values[i]! < values[best]!) best = i;
  return best;
}

/**
 * What is taken off level - reference so that both levels share one zero: `own-minimum` puts each at its own lowest,
 * `common` both at one conformer (the reference's lowest where none is named), `least-squares` takes the mean
 * difference (the offset of the least RMSD), `median` the median difference (of the least MAD).
 *
 * @param level, reference kcal/mol, same conformers, each with any zero
 * @param commonPlace conformer of `common`
 * @throws RangeError on a place that is none
 * @example offsetBetween([1.3, 1], [0, 0.4], "own-minimum") // 1
 */
export function offsetBetween(
  level: ArrayLike<number>,
  reference: ArrayLike<number>,
  align: Alignment,
  commonPlace?: number,
): number {
  if (align === "own-minimum") return level[lowestPlace(level)]! - reference[lowestPlace(reference)]!;
  if (align === "common") {
    const place = commonPlace ?? lowestPlace(reference);
    if (!(place >= 0 && place < level.length)) throw new RangeError(`No conformer at place ${place}.`);
    return level[place]! - reference[place]!;
  }
  const differences = Float64Array.from(level, (a, i) => a - reference[i]!);
  return align === "least-squares" ? mean(differences) : median(differences);
}

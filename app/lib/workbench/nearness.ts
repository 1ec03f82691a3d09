import type { SiftResult } from "../recipe/result.ts";

/** Frames by how near they lie to what they are most like. */
export interface NearnessBin {
  /** Å; the last bin of a histogram takes everything above it too. */
  from: number;
  to: number;
  /** Frames that were merged: by the RMSD to the conformer they repeat. */
  merged: number;
  /** Kept conformers: by the RMSD to the nearest other one. */
  apart: number;
}

export interface NearnessHistogram {
  bins: NearnessBin[];
  /** Everything in the last bin lies below its upper end. */
  closed: boolean;
  /** Å, of the farthest merged frame, and of the nearest pair of kept conformers; null where there is none. */
  farthestMerged: number | null;
  nearestApart: number | null;
}

const BINS = 40;
/** Å: shapes farther apart than that no tolerance would merge. */
const WIDEST = 2;

/**
 * How near the frames lie to each other: where a tolerance stands in a gap between "same" and "different", the choice
 * does not matter (methods page, section 6).
 *
 * @param nearest Å from each kept conformer to the nearest other one, by position; Infinity in a set of one
 * @param tolerance of the sift, which lies inside the histogram
 */
export function nearnessHistogram(
  result: SiftResult,
  nearest: ArrayLike<number>,
  tolerance: number,
): NearnessHistogram {
  const merged = result.dropped.map(({ rmsd }) => rmsd);
  const apart = Array.from(nearest).filter(Number.isFinite);
  const most = [...merged, ...apart].reduce((high, rmsd) => Math.max(high, rmsd), 0);
  const wanted = Math.max(0.05, Math.min(most * 1.02, Math.max(WIDEST, 2 * tolerance)), 1.2 * tolerance);
  const width = roundWidth(wanted / BINS);
  const count = Math.max(1, Math.ceil(wanted / width - 1e-9));
  const bins = Array.from({ length: count }, (_, k) => ({
    from: k * width,
    to: (k + 1) * width,
    merged: 0,
    apart: 0,
  }));
  const put = (rmsd: number, kind: "merged" | "apart") => {
    const bin = bins[Math.min(count - 1, Math.floor(rmsd / width))];
    if (bin) bin[kind] += 1;
  };
  for (const rmsd of merged) put(rmsd, "merged");
  for (const rmsd of apart) put(rmsd, "apart");
  return {
    bins,
    closed: most < count * width,
    farthestMerged: merged.length > 0 ? merged.reduce((high, rmsd) => Math.max(high, rmsd), 0) : null,
    nearestApart: apart.length > 0 ? apart.reduce((low, rmsd) => Math.min(low, rmsd), Infinity) : null,
  };
}

/** The next width of 1, 2 or 5 times a power of ten. */
function roundWidth(wanted: number): number {
  const power = 10 ** Math.floor(Math.log10(wanted));
  return (([1, 2, 5].find((step) => step * power >= wanted * (1 - 1e-9)) ?? 10) as number) * power;
}

/** Nearest others of one conformer, from the RMSDs of all to it; ties in the order of the set. */
export function nearestOthers(
  rmsd: ArrayLike<number>,
  reference: number,
  most: number,
): { index: number; rmsd: number }[] {
  const others: { index: number; rmsd: number }[] = [];
  for (let index = 0; index < rmsd.length; index++) {
    const value = rmsd[index];
    if (index !== reference && value !== undefined) others.push({ index, rmsd: value });
  }
  return others.sort((a, b) => a.rmsd - b.rmsd || a.index - b.index).slice(0, most);
}

/** Frames that were merged, the farthest first. */
export function farthestRepeats(
  result: SiftResult,
  most: number,
): { frame: number; repeats: number; rmsd: number; energyDifference: number | null }[] {
  return [...result.dropped].sort((a, b) => b.rmsd - a.rmsd || a.frame - b.frame).slice(0, most);
}

import { wrapDegrees } from "./geometry.ts";
import type { MeasureKind } from "./measure.ts";

/** One conformer's part of a bin. */
export interface BinPart {
  /** Position in the input. */
  index: number;
  share: number;
}

export interface Bin {
  from: number;
  to: number;
  /** Sum of the shares. */
  share: number;
  /** From the most populated down; equal ones in the order of the input. */
  parts: BinPart[];
}

export interface MeasureHistogram {
  bins: Bin[];
  /** Share of the conformers whose value is undefined: shown in words, never in a bin. */
  undefinedShare: number;
}

export const TORSION_BIN_DEG = 15;
/** Distances and angles: bins of a round width, at most this many. */
const MOST_BINS = 24;

/**
 * Distribution of a measured quantity over conformers, weighted by population.
 *
 * Torsions lie on a circle: their bins of 15° have the multiples of 15° in their middle, so that a peak at 60 or 180°
 * stands whole, and the circle is cut where the least lies, at -180° or near it where that is free. A conformer with
 * mirror degeneracy 2 enters half at t, half at -t, since its partner turns the other way. Distances
 * and angles are the same in both images; their bins, each with its lower bound, begin and end at round values.
 *
 * @param values Å or degrees, null where undefined
 * @param populations fractions, one a value
 * @param degeneracies 1 or 2, one a value
 * @returns shares that sum, with `undefinedShare`, to the sum of the populations; no bins where nothing is defined
 * @example measureHistogram("torsion", [60], [1], [2]).bins.filter((bin) => bin.share > 0).length // 2
 */
export function measureHistogram(
  kind: MeasureKind,
  values: readonly (number | null)[],
  populations: readonly number[],
  degeneracies: readonly number[],
): MeasureHistogram {
  if (values.length !== populations.length || values.length !== degeneracies.length) {
    throw new RangeError(
      `Each value needs a population and a degeneracy, found ${values.length}, ${populations.length} and ${degeneracies.length}.`,
    );
  }
  const defined = values.filter((value) => value !== null);
  const edges = kind === "torsion" ? torsionEdges(-TORSION_BINS / 2) : roundEdges(kind, defined);
  let bins: Bin[] = edges.slice(1).map((to, b) => ({ from: edges[b]!, to, share: 0, parts: [] }));
  let undefinedShare = 0;
  values.forEach((value, index) => {
    const share = populations[index]!;
    if (value === null) undefinedShare += share;
    else if (kind !== "torsion") add(bins[lowerBin(edges, value)]!, index, share);
    else {
      const paired = degeneracies[index] === 2;
      add(bins[torsionBin(value)]!, index, paired ? share / 2 : share);
      if (paired) add(bins[torsionBin(-value)]!, index, share / 2);
    }
  });
  for (const bin of bins) {
    bin.parts.sort((a, b) => populations[b.index]! - populations[a.index]! || a.index - b.index);
  }
  if (kind === "torsion") bins = cutWhereFree(bins);
  return { bins: defined.length > 0 ? bins : [], undefinedShare };
}

function add(bin: Bin, index: number, share: number): void {
  bin.share += share;
  // Both halves of a mirror pair near 0° or 180° fall into one bin: still one part, as it is one conformer.
  const last = bin.parts.at(-1);
  if (last?.index === index) last.share += share;
  else bin.parts.push({ index, share });
}

const TORSION_BINS = 360 / TORSION_BIN_DEG;

/** Edges of the bins from the one about `first` times 15° on. */
function torsionEdges(first: number): number[] {
  return Array.from({ length: TORSION_BINS + 1 }, (_, b) => (first + b - 0.5) * TORSION_BIN_DEG);
}

/** The bin about the nearest multiple of 15°, of two equally near the one nearer to 0: t and -t mirror each other. */
function torsionBin(value: number): number {
  const degrees = wrapDegrees(value);
  const nearest = Math.sign(degrees) * Math.ceil(Math.abs(degrees) / TORSION_BIN_DEG - 0.5);
  // -180 and 180° are one place.
  return (nearest + TORSION_BINS / 2) % TORSION_BINS;
}

/** A place counts as free where the two bins that meet there hold no more than this together. */
const FREE_SHARE = 0.01;
/** A cut below -180° weighs as one so many times as far above it: -165 to 195° is read more easily than -195 to 165°. */
const DOWNWARDS = 3;

/** Turns the circle of bins so that its ends meet where the least lies, of free places at the one nearest to -180°. */
function cutWhereFree(bins: readonly Bin[]): Bin[] {
  const count = bins.length;
  const share = (b: number) => bins[(b + count) % count]!.share;
  const cost = (b: number) => Math.max(0, share(b - 1) + share(b) - FREE_SHARE);
  const far = (b: number) => (b < 0 ? -b * DOWNWARDS : b);
  const places = Array.from({ length: count }, (_, k) => k - count / 2).sort((a, b) => far(a) - far(b));
  let first = 0;
  for (const b of places) if (cost(b) < cost(first) - 1e-9) first = b;
  const edges = torsionEdges(first - count / 2);
  return bins.map((_, k) => {
    const bin = bins[(first + k + count) % count]!;
    return { ...bin, from: edges[k]!, to: edges[k + 1]! };
  });
}

function roundEdges(kind: MeasureKind, values: readonly number[]): number[] {
  if (values.length === 0) return [];
  const low = Math.min(...values);
  const high = Math.max(...values);
  const widths = kind === "distance" ? [0.01, 0.02, 0.05, 0.1, 0.2, 0.5, 1, 2, 5] : [0.5, 1, 2, 5, 10, 15];
  const width = widths.find((w) => Math.floor(high / w) - Math.floor(low / w) < MOST_BINS) ?? widths.at(-1)!;
  const first = Math.floor(low / width);
  const count = Math.floor(high / width) - first + 1;
  return Array.from({ length: count + 1 }, (_, b) => Number(((first + b) * width).toFixed(6)));
}

/** The bin that holds a value, lower bounds included; the edges are found again by comparison, not by division. */
function lowerBin(edges: readonly number[], value: number): number {
  let bin = edges.length - 2;
  while (bin > 0 && value < edges[bin]!) bin--;
  return bin;
}

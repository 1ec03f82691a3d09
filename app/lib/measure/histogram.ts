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
 * A torsion runs from -180 to 180° in bins of 15°, each with its upper bound, so that 180 closes the last one; a
 * conformer with mirror degeneracy 2 enters half at t, half at -t, since its partner turns the other way. Distances
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
  const edges = kind === "torsion" ? torsionEdges() : roundEdges(kind, defined);
  const bins: Bin[] = edges.slice(1).map((to, b) => ({ from: edges[b]!, to, share: 0, parts: [] }));
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
  return { bins: defined.length > 0 ? bins : [], undefinedShare };
}

function add(bin: Bin, index: number, share: number): void {
  bin.share += share;
  // Both halves of a mirror pair near 0° or 180° fall into one bin: still one part, as it is one conformer.
  const last = bin.parts.at(-1);
  if (last?.index === index) last.share += share;
  else bin.parts.push({ index, share });
}

function torsionEdges(): number[] {
  const count = 360 / TORSION_BIN_DEG;
  return Array.from({ length: count + 1 }, (_, b) => -180 + b * TORSION_BIN_DEG);
}

function torsionBin(value: number): number {
  return Math.max(0, Math.ceil((wrapDegrees(value) + 180) / TORSION_BIN_DEG) - 1);
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

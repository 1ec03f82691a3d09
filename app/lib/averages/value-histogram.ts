import type { BinPart } from "../measure/histogram.ts";
import { roundTicks } from "../workbench/ticks.ts";
import { wrapTurn } from "./angle.ts";
import type { Moments } from "./average.ts";

export interface ValueHistogram {
  bins: { from: number; to: number; share: number; parts: BinPart[] }[];
  /** Width of a bin. */
  width: number;
}

/** About so many bins. */
const BINS = 16;

/**
 * Distribution of a quantity over conformers by population, in bins of a round width, each with its lower bound. Values
 * that stand for both hands enter half at each sign. Angles run from minus to plus half a turn in 24 steps (of 15°), closed above.
 *
 * @returns null where no conformer has a value
 */
export function valueHistogram(moments: Moments, populations: ArrayLike<number>): ValueHistogram | null {
  const circular = moments.rule === "circular";
  const entries: { index: number; value: number; share: number }[] = [];
  for (let i = 0; i < populations.length; i++) {
    if (moments.present[i] === 0) continue;
    const value = circular ? wrapTurn(moments.values[i]!, moments.turn) : moments.values[i]!;
    const paired = moments.mirrored[i] === 1;
    entries.push({ index: i, value, share: populations[i]! / (paired ? 2 : 1) });
    if (paired)
      entries.push({
        index: i,
        value: circular && value === moments.turn / 2 ? value : -value,
        share: populations[i]! / 2,
      });
  }
  if (entries.length === 0) return null;
  const edges = circular ? angleEdges(moments.turn) : roundEdges(entries.map((entry) => entry.value));
  const bins = edges.slice(1).map((to, b): ValueHistogram["bins"][number] => ({
    from: edges[b]!,
    to,
    share: 0,
    parts: [],
  }));
  for (const { index, value, share } of entries) {
    const bin = bins[placeOf(edges, value, circular)]!;
    bin.share += share;
    const known = bin.parts.find((part) => part.index === index);
    if (known) known.share += share;
    else bin.parts.push({ index, share });
  }
  for (const bin of bins) bin.parts.sort((a, b) => b.share - a.share || a.index - b.index);
  return { bins, width: edges[1]! - edges[0]! };
}

function angleEdges(turn: number): number[] {
  return Array.from({ length: 25 }, (_, b) => (turn * (b - 12)) / 24);
}

function roundEdges(values: readonly number[]): number[] {
  const low = values.reduce((least, value) => Math.min(least, value), Number.POSITIVE_INFINITY);
  const high = values.reduce((most, value) => Math.max(most, value), Number.NEGATIVE_INFINITY);
  const span =
    high - low > 1e-9 * Math.max(1, Math.abs(high)) ? high - low : Math.max(1e-6, Math.abs(high) / 10);
  const ticks = roundTicks(0, span, BINS);
  const width = ticks[1]! - ticks[0]!;
  const first = Math.floor(low / width + 1e-9);
  const last = Math.floor(high / width + 1e-9);
  return Array.from({ length: last - first + 2 }, (_, b) => Number(((first + b) * width).toPrecision(12)));
}

function placeOf(edges: readonly number[], value: number, closedAbove: boolean): number {
  let bin = edges.length - 2;
  if (closedAbove) while (bin > 0 && value <= edges[bin]!) bin--;
  else while (bin > 0 && value < edges[bin]! - 1e-9 * Math.abs(edges[bin]!)) bin--;
  return bin;
}

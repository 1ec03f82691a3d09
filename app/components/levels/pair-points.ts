import { formatEnergy, formatPopulation, signed, withUnit } from "~/lib/format";
import type { Comparison } from "./use-comparison";

/** One conformer in the figures of a comparison. */
export interface PairPoint {
  place: number;
  frame: number;
  name: string;
  /** kcal/mol above the lowest of each level. */
  level: number;
  reference: number;
  /** Deviation after the zero of energy is shared, kcal/mol. */
  deviation: number;
  /** Fractions. */
  levelPopulation: number;
  referencePopulation: number;
}

/** More than these make a cloud, not points: the most populated at the reference are drawn, and the note says so. */
export const MOST_POINTS = 2000;

/** Points of a comparison, in the order of its members. */
export function pairPoints({ paired, comparison }: Comparison): PairPoint[] {
  const lowestLevel = minimum(paired.level);
  const lowestReference = minimum(paired.reference);
  return paired.members.map(({ frame, name }, place) => ({
    place,
    frame,
    name,
    level: (paired.level[place] ?? 0) - lowestLevel,
    reference: (paired.reference[place] ?? 0) - lowestReference,
    deviation: comparison.deviations[place] ?? 0,
    levelPopulation: comparison.levelPopulations[place] ?? 0,
    referencePopulation: comparison.referencePopulations[place] ?? 0,
  }));
}

function minimum(values: Float64Array): number {
  return values.reduce((least, value) => Math.min(least, value), Number.POSITIVE_INFINITY);
}

/** The points that are drawn, weakest first, so that the most populated lie on top. */
export function drawnPoints(points: readonly PairPoint[]): PairPoint[] {
  return [...points]
    .sort((a, b) => a.referencePopulation - b.referencePopulation || b.place - a.place)
    .slice(-MOST_POINTS);
}

/** What the line below a figure reads of a point. */
export function pointWords(point: PairPoint, level: string, reference: string): string {
  return (
    `${point.name === `frame ${point.frame}` ? point.name : `${point.name}, frame ${point.frame}`}: ` +
    `${formatEnergy(point.level)} at ${level}, ${withUnit(formatEnergy(point.reference), "kcal/mol")} at ${reference}, ` +
    `deviation ${signed(point.deviation, 2)}, population ${formatPopulation(point.levelPopulation)} and ` +
    `${withUnit(formatPopulation(point.referencePopulation), "%")}`
  );
}

/** Upper end of an energy axis: everything for small sets, else most of it and what the window of 99 % needs. */
export function energyTop(values: readonly number[], needed: number): number {
  const sorted = Float64Array.from(values).sort();
  const all = sorted.at(-1) ?? 1;
  const most = sorted.length <= 60 ? all : (sorted[Math.floor(0.95 * (sorted.length - 1))] ?? all);
  return Math.max(0.5, 1.06 * Math.min(all, Math.max(most, 1.1 * needed)));
}

/** Width of a letter of 12 px. */
export const LETTER_PX = 7;

/** Labels that do not lie on each other, in pixels; of two that would, the first stays. */
export function apart<P extends { x: number; y: number; text: string }>(labels: readonly P[]): P[] {
  const kept: P[] = [];
  for (const label of labels) {
    const clear = kept.every(
      (other) =>
        Math.abs(other.y - label.y) > 14 ||
        label.x > other.x + LETTER_PX * other.text.length + 6 ||
        other.x > label.x + LETTER_PX * label.text.length + 6,
    );
    if (clear) kept.push(label);
  }
  return kept;
}

/** "12.3" of a fraction, for data tables: per cent as a number. */
export function percent(fraction: number): number {
  return 100 * fraction;
}

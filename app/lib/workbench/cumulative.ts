import type { ConformerRow } from "./conformers.ts";

/** Shares read off the curve, as fractions. */
export const READ_SHARES = [0.5, 0.9, 0.95, 0.99] as const;

export interface CumulativeStep {
  /** Window that just reaches this conformer, kcal/mol. */
  energy: number;
  /** Population within that window, fraction. */
  share: number;
  /** Conformers within it. */
  count: number;
}

export interface ShareReading extends CumulativeStep {
  /** The share asked for. */
  asked: number;
}

export interface Cumulative {
  /** Rising in energy, one step an energy (conformers of the same energy come together). */
  steps: CumulativeStep[];
  /** The narrowest window that holds each share. */
  readings: ShareReading[];
}

/**
 * Population within an energy window, as a function of the window.
 *
 * @returns null without energies or without conformers
 * @example cumulativePopulation(rows).readings[1] // { asked: 0.9, energy: 1.65, share: 0.901, count: 13 }
 */
export function cumulativePopulation(rows: readonly ConformerRow[]): Cumulative | null {
  if (rows.length === 0) return null;
  const known: { energy: number; population: number }[] = [];
  for (const row of rows) {
    if (row.relativeEnergy === null || row.population === null) return null;
    known.push({ energy: row.relativeEnergy, population: row.population });
  }
  known.sort((a, b) => a.energy - b.energy);
  const steps: CumulativeStep[] = [];
  let share = 0;
  for (const [k, { energy, population }] of known.entries()) {
    share += population;
    const step = { energy, share: Math.min(1, share), count: k + 1 };
    if (steps.at(-1)?.energy === energy) steps[steps.length - 1] = step;
    else steps.push(step);
  }
  const readings = READ_SHARES.map((asked) => {
    // The last step holds everything, but its sum may end a rounding below 1.
    const step = steps.find((s) => s.share >= asked) ?? steps.at(-1)!;
    return { asked, ...step };
  });
  return { steps, readings };
}

/** Population and count within a window; the whole set where there is none. */
export function withinWindow(
  cumulative: Cumulative,
  windowKcal: number | null,
): { share: number; count: number } {
  const steps =
    windowKcal === null ? cumulative.steps : cumulative.steps.filter((step) => step.energy <= windowKcal);
  const last = steps.at(-1);
  return last ? { share: last.share, count: last.count } : { share: 0, count: 0 };
}

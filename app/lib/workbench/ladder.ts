import { thermalEnergyKcal } from "../units.ts";
import type { ConformerRow } from "./conformers.ts";

/** More rungs than pixels say nothing and cost much. */
const MAX_RUNGS = 600;
const CURVE_POINTS = 60;

export interface Rung {
  index: number;
  name: string;
  frame: number;
  energy: number;
  population: number;
  weight: number;
}

export interface Ladder {
  /** Rungs to draw, rising in energy. */
  rungs: Rung[];
  /** Conformers below `top` whose rung is covered by a more populated one at the same height. */
  covered: number;
  /** Conformers above `top`, which are not drawn. */
  above: { count: number; share: number };
  /** Upper end of the energy axis, kcal/mol. */
  top: number;
  /** Upper end of the population axis, fraction. */
  widest: number;
  /** The Boltzmann curve of the commonest weight: population against energy. */
  curve: { weight: number; points: { energy: number; population: number }[] };
}

/**
 * What the energy ladder draws: one rung a conformer at its energy, as long as its population.
 *
 * The axis ends above what holds 99.5 % of the population and above the window where the window is near; what lies
 * higher is counted instead of drawn.
 *
 * @returns null without energies or without conformers
 */
export function energyLadder(
  rows: readonly ConformerRow[],
  temperatureK: number,
  windowKcal: number | null,
): Ladder | null {
  const all = rungsOf(rows);
  if (all === null || all.length === 0) return null;
  const rt = thermalEnergyKcal(temperatureK);
  const top = ladderTop(all, rt, windowKcal);
  const drawn = all.filter((rung) => rung.energy <= top);
  const rungs = thin(drawn, top);
  const weight = commonest(all.map((rung) => rung.weight));
  // Every rung of weight w lies on w/Z exp(-E/RT); 1/Z from the most populated rung, where it is known best.
  const best = all.reduce((a, b) => (b.population > a.population ? b : a));
  const scale = (weight * best.population) / best.weight;
  const points = Array.from({ length: CURVE_POINTS + 1 }, (_, k) => {
    const energy = (top * k) / CURVE_POINTS;
    return { energy, population: scale * Math.exp(-(energy - best.energy) / rt) };
  });
  const above = all.filter((rung) => rung.energy > top);
  return {
    rungs,
    covered: drawn.length - rungs.length,
    above: { count: above.length, share: above.reduce((sum, rung) => sum + rung.population, 0) },
    top,
    widest: Math.max(best.population, scale * Math.exp(best.energy / rt)),
    curve: { weight, points },
  };
}

function rungsOf(rows: readonly ConformerRow[]): Rung[] | null {
  const rungs: Rung[] = [];
  for (const row of rows) {
    if (row.relativeEnergy === null || row.population === null || row.weight === null) return null;
    rungs.push({
      index: row.index,
      name: row.name,
      frame: row.frame,
      energy: row.relativeEnergy,
      population: row.population,
      weight: row.weight,
    });
  }
  return rungs.sort((a, b) => a.energy - b.energy || a.index - b.index);
}

/** Shared by every chart with an energy axis, so that the same window stands at the same height in each. */
function ladderTop(rungs: readonly Rung[], rt: number, windowKcal: number | null): number {
  const highest = rungs.at(-1)!.energy;
  let held = 0;
  let needed = highest;
  for (const rung of rungs) {
    held += rung.population;
    if (held >= 0.995) {
      needed = rung.energy;
      break;
    }
  }
  const near = windowKcal !== null && windowKcal <= 1.6 * Math.max(highest, 2 * rt) ? windowKcal : 0;
  const wanted = Math.max(Math.min(highest, Math.max(needed, 4 * rt)), near, rt);
  return 1.12 * wanted;
}

/** Keeps the most populated rung of each height, 1 of `MAX_RUNGS`. */
function thin(rungs: readonly Rung[], top: number): Rung[] {
  if (rungs.length <= MAX_RUNGS) return [...rungs];
  const best = new Map<number, Rung>();
  for (const rung of rungs) {
    const bin = Math.min(MAX_RUNGS - 1, Math.floor((rung.energy / top) * MAX_RUNGS));
    const other = best.get(bin);
    if (!other || rung.population > other.population) best.set(bin, rung);
  }
  return [...best.values()].sort((a, b) => a.energy - b.energy || a.index - b.index);
}

/** The value that occurs most often; of equally frequent ones the largest. */
function commonest(values: readonly number[]): number {
  const counts = new Map<number, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  return [...counts.entries()].sort((a, b) => b[1] - a[1] || b[0] - a[0])[0]![0];
}

export interface PlacedLabel {
  names: string[];
  /** Where the label stands, in pixels from the top. */
  y: number;
  /** The farthest right end of the marks it names, in pixels. */
  x: number;
}

/**
 * Merges labels that would stand closer than `gap` pixels: "c3, c4".
 *
 * @param marks in any order
 */
export function mergeLabels(
  marks: readonly { name: string; x: number; y: number }[],
  gap = 13,
): PlacedLabel[] {
  const placed: { names: string[]; ys: number[]; x: number }[] = [];
  for (const mark of [...marks].sort((a, b) => b.y - a.y)) {
    const last = placed.at(-1);
    const lastY = last ? mean(last.ys) : 0;
    if (last && lastY - mark.y < gap) {
      last.names.push(mark.name);
      last.ys.push(mark.y);
      last.x = Math.max(last.x, mark.x);
    } else placed.push({ names: [mark.name], ys: [mark.y], x: mark.x });
  }
  return placed.map(({ names, ys, x }) => ({ names, y: mean(ys), x }));
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

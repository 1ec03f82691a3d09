import { averageOf, type Moments } from "../averages/average.ts";
import { averageErrorsOf, type PropertyValues, propertyMoments } from "../averages/property-set.ts";
import type { SiftRecipe } from "../recipe/recipe.ts";
import type { KeptConformer } from "../recipe/result.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { temperatureWarning } from "../thermo/temperature-warning.ts";
import { DRAWS, type DrawInput } from "../trust/energy-draws.ts";
import { populationError } from "../trust/population-error.ts";
import type { EditionContent, EditionPopulations } from "./content.ts";

/** Values kept for quantiles, as many as the section on trust keeps; of very large sets fewer draws are taken. */
const KEPT_VALUES = 4_000_000;
const MOST_VALUES = 20_000_000;
const FEWEST_DRAWS = 1_000;

/** Everything that the draws of an edition start from: plain data, so that a thread can take it. */
export interface UncertaintyInput {
  /** kcal/mol, in the order of the set. */
  energies: number[];
  weights: number[];
  temperatureK: number;
  /** Error of the level, kcal/mol, one standard deviation. */
  sigma: number;
  seed: number;
  moments: Moments[];
}

/** What the draws say: the part of an edition that chance makes, fixed by its seed. */
export interface DrawnUncertainty {
  sigma: number;
  seed: number;
  draws: number;
  generator: string;
  populations: { mean: number; sd: number; low: number; median: number; high: number; lowest: number }[];
  /** Rows that hold the lowest in 95 % of the draws, the likeliest first. */
  lowestSet: number[];
  averages: { sd: number; low: number | null; high: number | null }[];
  averageDraws: number;
}

/**
 * Draws of an edition over so many conformers: 10,000 up to 400 of them, then fewer; even. The section on trust takes as many.
 *
 * @example editionDraws(31) // 10000
 */
export function editionDraws(conformers: number): number {
  const n = Math.max(1, conformers);
  const wanted = Math.min(DRAWS, Math.max(FEWEST_DRAWS, KEPT_VALUES / n), MOST_VALUES / n);
  return Math.max(2, 2 * Math.floor(wanted / 2));
}

/**
 * How far the error of the level moves populations and averages: the draws of Trust and Averages, with their seed.
 *
 * @throws RangeError as `forEachDraw`
 * @example drawUncertainty({ energies: [0, 0.5], weights: [1, 1], temperatureK: 298.15, sigma: 0.5, seed: 1, moments: [] })
 */
export function drawUncertainty(input: UncertaintyInput): DrawnUncertainty {
  const { energies, weights, temperatureK, sigma, seed, moments } = input;
  const draw: DrawInput = { energies, weights, temperatureK, error: { sigma }, seed };
  const found = populationError({ ...draw, draws: editionDraws(energies.length) });
  const drawn =
    moments.length === 0
      ? { errors: [], draws: 0 }
      : averageErrorsOf(moments, { energies, weights, temperatureK }, { sigma, seed });
  return {
    sigma,
    seed,
    draws: found.draws,
    generator: found.generator,
    populations: found.populations.map(({ mean, sd, low, median, high }, row) => ({
      ...{ mean, sd, low, median, high },
      lowest: found.lowestShare[row] ?? 0,
    })),
    lowestSet: found.lowestSet,
    averages: drawn.errors.map((error) =>
      error === null ? { sd: 0, low: null, high: null } : { sd: error.sd, low: error.low, high: error.high },
    ),
    averageDraws: drawn.draws,
  };
}

/** The properties of an edition, prepared for averaging. */
export function editionMoments(
  properties: readonly PropertyValues[],
  kept: readonly KeptConformer[],
  recipe: Pick<SiftRecipe, "mirror" | "chirality">,
): Moments[] {
  const merged = recipe.mirror === "merge" && recipe.chirality === "achiral";
  return properties.map((property) => propertyMoments(property, kept, merged));
}

/** What an edition keeps of the draws; the averages stand beside their values. */
export function uncertaintySection(
  drawn: DrawnUncertainty | null,
  sigmaFrom: string | null,
): EditionContent["uncertainty"] {
  if (drawn === null) return null;
  const { averages: _averages, ...rest } = drawn;
  return { ...rest, sigmaFrom };
}

/** Populations, thermodynamics and averages at several temperatures with the same energies; null without populations. */
export function temperaturesSection(options: {
  kelvin: readonly number[];
  kept: readonly KeptConformer[];
  populations: EditionPopulations | null;
  moments: readonly Moments[];
  level: EditionContent["level"];
}): EditionContent["temperatures"] {
  const { kept, populations, moments, level } = options;
  if (populations === null || level === null || options.kelvin.length === 0) return null;
  const kelvin = [...new Set([...options.kelvin, populations.temperature])].sort((a, b) => a - b);
  const energies = kept.map(({ relativeEnergy }) => relativeEnergy ?? 0);
  const weights = populations.values.map(({ weight }) => weight);
  const at = kelvin.map((temperature) => weigh(energies, weights, temperature));
  return {
    kelvin,
    populations: at.map((weighed) => Array.from(weighed.populations)),
    thermo: at.map(({ freeEnergy, energy, entropy, effectiveCount }) => ({
      freeEnergy,
      energy,
      entropy,
      effectiveCount,
    })),
    averages: at.map((weighed) => moments.map((one) => averageOf(one, weighed.populations).value)),
    // The first that does not hold speaks for all: free energies belong to one temperature.
    warning:
      kelvin.map((temperature) => temperatureWarning(level, temperature)).find((text) => text !== null) ??
      null,
  };
}

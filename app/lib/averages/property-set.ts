import type { KeptConformer } from "../recipe/result.ts";
import { DRAWS, type DrawInput } from "../trust/energy-draws.ts";
import { type Average, type Moments, momentsOf } from "./average.ts";
import type { AveragesRow } from "./averages-csv.ts";
import type { ObservableDefinition } from "./observable.ts";
import { type AverageRule, isPseudoscalar } from "./rule.ts";
import { type AverageError, averageErrors } from "./uncertainty.ts";

/** A property column over the conformers of a distinct set, as pages and files take it. */
export interface PropertyValues {
  id: string;
  name: string;
  unit: string | null;
  rule: AverageRule;
  /** What the numbers come from: a file, a formula, picked atoms. */
  origin: string | null;
  definition: ObservableDefinition | null;
  /** Per-atom properties: the quantity they share, and the equivalent atoms (from 0) whose mean this is. */
  quantity: string | null;
  atoms: number[] | null;
  /** By position in the set; equivalent atoms are merged already. */
  values: (number | null)[];
}

/** A quantity with its name beside its moments. */
export function propertyMoments(
  property: PropertyValues,
  kept: readonly KeptConformer[],
  mirrorMerged: boolean,
): Moments {
  const odd = property.rule === "linear" && mirrorMerged && isPseudoscalar(property.name);
  return momentsOf(
    { rule: odd ? "odd" : property.rule, unit: property.unit, values: property.values },
    { degeneracies: kept.map((conformer) => conformer.degeneracy), mirrorMerged },
  );
}

/** Multiplications that a Monte Carlo may cost before it takes fewer draws: about a second. */
const BUDGET = 4e8;
const FEWEST = 500;

/**
 * Draws for so many quantities over so many conformers: 10,000, fewer where that would keep a processor busy; even.
 *
 * @example averageDraws(31, 8) // 10000
 */
export function averageDraws(conformers: number, quantities: number): number {
  const fitting = 2 * Math.floor(BUDGET / Math.max(1, conformers * (quantities + 10)) / 2);
  return Math.min(DRAWS, Math.max(FEWEST, fitting));
}

/** More multiplications than these (about 0.1 s) belong on a thread, in the server and in the page. */
export const DRAWN_AT_ONCE = 4e7;

/** Multiplications that the draws for so many quantities over so many conformers take. */
export function drawWork(conformers: number, quantities: number): number {
  return averageDraws(conformers, quantities) * conformers * (quantities + 10);
}

/** The error of the energies as draws of a set: everything but the draws themselves. */
export function averageErrorsOf(
  moments: readonly Moments[],
  weighed: { energies: ArrayLike<number>; weights: ArrayLike<number>; temperatureK: number },
  error: { sigma: number; seed: number },
): { errors: (AverageError | null)[]; draws: number } {
  const draws = averageDraws(weighed.energies.length, moments.length);
  const input: DrawInput = { ...weighed, error: { sigma: error.sigma }, seed: error.seed, draws };
  return { errors: averageErrors(moments, input), draws };
}

/** Rows of `averages.csv`. */
export function averagesRows(
  properties: readonly PropertyValues[],
  averages: readonly Average[],
  errors: readonly (AverageError | null)[] | null,
): AveragesRow[] {
  return properties.map((property, k) => {
    const average = averages[k]!;
    return {
      property: property.name,
      unit: property.unit,
      rule: property.rule,
      average: average.value,
      spread: average.spread,
      uncertainty: average.value === null ? null : (errors?.[k]?.sd ?? null),
      covered: average.covered,
    };
  });
}

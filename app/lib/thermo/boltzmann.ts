import { GAS_CONSTANT_KCAL, thermalEnergyKcal } from "../units.ts";

/** Populations and thermodynamics of a set of conformers, relative to the lowest of them. */
export interface Weighed {
  /** Fractions, in the order given; they sum to 1 within 1e-12. */
  populations: Float64Array;
  /** -RT ln sum w exp(-(E - Emin)/RT), kcal/mol. */
  freeEnergy: number;
  /** Mean relative energy, kcal/mol. */
  energy: number;
  /** cal/(mol K). */
  entropy: number;
  /** cal/(mol K). */
  heatCapacity: number;
  /** exp(entropy/R): microstates that effectively share the population (Hill, Ecology 1973, 54, 427; order 1). */
  effectiveCount: number;
}

/**
 * Boltzmann populations and conformational thermodynamics from relative energies and weights.
 *
 * p_i = w_i exp(-e_i/RT)/Z with e_i = E_i - min E; F = -RT ln Z, U = sum p e, S = -R sum p ln(p/w),
 * C = sum p (e - U)^2 / (R T^2). Evaluated by log-sum-exp; sums run from the smallest term to the largest,
 * so that the same input gives the same digits on server and browser.
 *
 * @param energies kcal/mol, any common zero
 * @param weights number of equal-energy copies that each entry stands for, above zero
 * @param temperatureK above zero
 * @throws RangeError on empty input, a non-finite energy, a weight not above zero, unequal lengths, or a temperature not above zero
 * @example weigh([0, 0.598], [1, 2], 298.15).populations // 0.578, 0.422
 */
export function weigh(
  energies: ArrayLike<number>,
  weights: ArrayLike<number>,
  temperatureK: number,
): Weighed {
  const rt = thermalEnergyKcal(temperatureK);
  const n = energies.length;
  if (n === 0) throw new RangeError("No conformer to weigh.");
  if (weights.length !== n) throw new RangeError(`${n} energies but ${weights.length} weights.`);
  let lowest = Number.POSITIVE_INFINITY;
  for (let i = 0; i < n; i++) {
    if (!Number.isFinite(energies[i]!)) throw new RangeError(`Energy ${i + 1} is not a finite number.`);
    if (!(weights[i]! > 0 && Number.isFinite(weights[i]!)))
      throw new RangeError(`Weight ${i + 1} is not above zero.`);
    if (energies[i]! < lowest) lowest = energies[i]!;
  }
  const exponents = new Float64Array(n);
  let top = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < n; i++) {
    exponents[i] = Math.log(weights[i]!) - (energies[i]! - lowest) / rt;
    if (exponents[i]! > top) top = exponents[i]!;
  }
  // A typed array sorts by number and is not stable in what matters here: equal terms add alike.
  const ascending = exponents.slice().sort();
  let scaled = 0;
  for (let i = 0; i < n; i++) scaled += Math.exp(ascending[i]! - top);
  const logZ = top + Math.log(scaled);

  const populations = new Float64Array(n);
  for (let i = 0; i < n; i++) populations[i] = Math.exp(exponents[i]! - logZ);
  const order = Array.from({ length: n }, (_, i) => i).sort(
    (a, b) => populations[a]! - populations[b]! || a - b,
  );
  let energy = 0;
  let surprise = 0;
  for (const i of order) {
    const p = populations[i]!;
    energy += p * (energies[i]! - lowest);
    // ln(p/w) from the exponents: exact where p underflows to 0.
    surprise += p * (exponents[i]! - logZ - Math.log(weights[i]!));
  }
  let variance = 0;
  for (const i of order) {
    const d = energies[i]! - lowest - energy;
    variance += populations[i]! * d * d;
  }
  return {
    populations,
    freeEnergy: -rt * logZ,
    energy,
    entropy: 1000 * GAS_CONSTANT_KCAL * -surprise,
    heatCapacity: (1000 * variance) / (rt * temperatureK),
    effectiveCount: Math.exp(-surprise),
  };
}

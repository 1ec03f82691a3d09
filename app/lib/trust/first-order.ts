import { thermalEnergyKcal } from "../units.ts";

/**
 * First-order uncertainty from the error of the energies: holds where sigma is well below RT (0.59 kcal/mol at room
 * temperature), and serves as a check of the draws. dp_i/de_j = -p_i (delta_ij - p_j)/RT.
 */

/**
 * Standard deviations of populations for independent errors of one size: (sigma p_i/RT) sqrt(sum_j (delta_ij - p_j)^2).
 *
 * @param populations fractions
 * @param sigmaKcal kcal/mol
 * @param correlation constant between any two errors: multiplies by sqrt(1 - correlation)
 * @example firstOrderPopulationSd([0.5, 0.5], 0.5, 298.15)[0] // 0.29836
 */
export function firstOrderPopulationSd(
  populations: ArrayLike<number>,
  sigmaKcal: number,
  temperatureK: number,
  correlation = 0,
): Float64Array {
  const rt = thermalEnergyKcal(temperatureK);
  let squares = 0;
  for (let j = 0; j < populations.length; j++) squares += populations[j]! ** 2;
  return Float64Array.from(populations, (p) => {
    // sum_j (delta_ij - p_j)^2 = sum p^2 - p_i^2 + (1 - p_i)^2
    const spread = squares - p * p + (1 - p) ** 2;
    return ((sigmaKcal * p) / rt) * Math.sqrt(spread * (1 - correlation));
  });
}

/**
 * Standard deviation of an average sum p A for independent errors of one size: (sigma/RT) sqrt(sum p^2 (A - <A>)^2).
 *
 * @example firstOrderAverageSd([13, 4.5], [0.57839, 0.42161], 0.3, 298.15) // 1.484
 */
export function firstOrderAverageSd(
  values: ArrayLike<number>,
  populations: ArrayLike<number>,
  sigmaKcal: number,
  temperatureK: number,
  correlation = 0,
): number {
  let average = 0;
  for (let i = 0; i < values.length; i++) average += populations[i]! * values[i]!;
  let squares = 0;
  for (let i = 0; i < values.length; i++) squares += (populations[i]! * (values[i]! - average)) ** 2;
  return (sigmaKcal / thermalEnergyKcal(temperatureK)) * Math.sqrt(squares * (1 - correlation));
}

/**
 * Standard deviation of the conformational free energy for independent errors of one size: sigma sqrt(sum p^2), kcal/mol.
 *
 * @example firstOrderFreeEnergySd([0.48096, 0.41365, 0.08894, 0.01645], 0.5) // 0.32039
 */
export function firstOrderFreeEnergySd(populations: ArrayLike<number>, sigmaKcal: number): number {
  let squares = 0;
  for (let j = 0; j < populations.length; j++) squares += populations[j]! ** 2;
  return sigmaKcal * Math.sqrt(squares);
}

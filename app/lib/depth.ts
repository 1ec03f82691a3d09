/** Depth tint: population as one of seven steps with fixed break points, so that a tint means the same everywhere. */

export type DepthStep = 1 | 2 | 3 | 4 | 5 | 6 | 7;

/** Lower bounds of steps 2 to 7, as fractions. */
export const DEPTH_BREAKS = [0.01, 0.02, 0.05, 0.1, 0.2, 0.4] as const;

/**
 * The tint step of a population.
 *
 * @param population fraction, 0 to 1; anything that is no number gives step 1
 * @example depthStep(0.285) // 6
 */
export function depthStep(population: number): DepthStep {
  let step = 1;
  for (const bound of DEPTH_BREAKS) if (population >= bound) step += 1;
  return step as DepthStep;
}

/** The colour token of a population, for `fill`, `stroke` and `background`. */
export function depthColour(population: number): string {
  return `var(--color-depth-${depthStep(population)})`;
}

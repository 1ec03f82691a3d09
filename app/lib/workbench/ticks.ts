/**
 * Round values of an axis.
 *
 * @param most values wanted at most, at least 2
 * @returns multiples of 1, 2, 2.5 or 5 times a power of ten that lie in the range, ascending; one value where the range is empty
 * @example roundTicks(0, 65, 5) // 0, 20, 40, 60
 */
export function roundTicks(low: number, high: number, most = 6): number[] {
  if (!(high > low)) return [low];
  const step = roundStep((high - low) / Math.max(1, most - 1));
  const first = Math.ceil(low / step - 1e-9);
  const ticks: number[] = [];
  for (let k = first; k * step <= high + step * 1e-9; k++) ticks.push(clean(k * step));
  return ticks;
}

/** The smallest round step that is at least `rough`. */
function roundStep(rough: number): number {
  const power = 10 ** Math.floor(Math.log10(rough));
  for (const factor of [1, 2, 2.5, 5]) if (factor * power >= rough * (1 - 1e-9)) return factor * power;
  return 10 * power;
}

/** Takes the last bits off a product such as 3 x 0.1. */
function clean(value: number): number {
  return Number(value.toPrecision(12));
}

/** Decimals that all ticks need: 0 for 0, 20, 40; 2 for 0.25, 0.5. */
export function tickDigits(ticks: readonly number[]): number {
  return Math.max(
    0,
    ...ticks.map((tick) => (String(Number(tick.toPrecision(10))).split(".")[1] ?? "").length),
  );
}

/**
 * Ranks that an axis of ranks names: the first, then every 1, 2, 5, 10, 20, ... so that there are at most nine.
 *
 * @param most the deepest rank shown
 * @example rankTicks(24) // [1, 5, 10, 15, 20]
 */
export function rankTicks(most: number): number[] {
  let step = 1;
  for (let decade = 1; most / step > 8; decade *= 10) {
    for (const part of [2, 5, 10]) {
      if (most / step > 8) step = part * decade;
    }
  }
  const ticks = [1];
  for (let rank = step; rank <= most; rank += step) if (rank > 1) ticks.push(rank);
  return ticks;
}

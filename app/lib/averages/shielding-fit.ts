/** Straight line y = intercept + slope x by least squares. */
export interface Line {
  slope: number;
  intercept: number;
  /** Pairs that it was fitted to. */
  n: number;
}

/** Pairs below which no line is fitted to shieldings: two points fix one, and say nothing of it. */
export const FEWEST_FOR_SCALING = 3;
/** Pairs below which computed values are not corrected by their line against measured ones: our own starting value. */
export const FEWEST_FOR_CORRECTION = 5;

/**
 * Line of least squares.
 *
 * @returns null for fewer than two pairs, or where all x are equal
 * @throws RangeError on lists of different length
 * @example fitLine([0, 1, 2], [1, 3, 5]) // slope 2, intercept 1
 */
export function fitLine(x: ArrayLike<number>, y: ArrayLike<number>): Line | null {
  const n = x.length;
  if (y.length !== n) throw new RangeError(`${n} values against ${y.length}.`);
  if (n < 2) return null;
  let meanX = 0;
  let meanY = 0;
  for (let i = 0; i < n; i++) {
    meanX += x[i]! / n;
    meanY += y[i]! / n;
  }
  let sxx = 0;
  let sxy = 0;
  for (let i = 0; i < n; i++) {
    sxx += (x[i]! - meanX) ** 2;
    sxy += (x[i]! - meanX) * (y[i]! - meanY);
  }
  if (!(sxx > 0)) return null;
  const slope = sxy / sxx;
  return { slope, intercept: meanY - slope * meanX, n };
}

/**
 * Slope and intercept of shieldings against known shifts of one nucleus: sigma = intercept + slope delta, slope near -1
 * (linear scaling, Chem. Rev. 2012, 112, 1839, from memory). They belong to level, solvent and nucleus.
 *
 * @param shieldings, shifts ppm, pair by pair
 * @returns null for fewer than three pairs, or where the shifts are all equal
 * @example fitShieldings([180, 150, 110, 60], [8, 38, 76, 126]) // slope -1.0200411, intercept 188.2425488
 */
export function fitShieldings(shieldings: ArrayLike<number>, shifts: ArrayLike<number>): Line | null {
  return shieldings.length < FEWEST_FOR_SCALING ? null : fitLine(shifts, shieldings);
}

/**
 * Shift of a shielding: delta = (intercept - sigma)/(-slope). With slope -1 the intercept is the shielding of the
 * reference compound: delta = sigma_ref - sigma.
 *
 * @throws RangeError on a slope of 0
 * @example shiftOf(180, { slope: -1.0200411, intercept: 188.2425488 }) // 8.0806 ppm
 */
export function shiftOf(shielding: number, { slope, intercept }: Omit<Line, "n">): number {
  if (slope === 0) throw new RangeError("A slope of 0 makes every shielding one shift.");
  return (intercept - shielding) / -slope;
}

/** Computed values against measured ones of one kind. */
export interface Agreement {
  n: number;
  /** Means of |d| and of d, d = computed - measured. */
  mad: number;
  msd: number;
  rmsd: number;
  /** Largest |d| and its place, from 0. */
  max: number;
  maxPlace: number;
  /** Computed against measured, d = m e + b; with the mean |d| once that line is taken out; null below five pairs. */
  corrected: { line: Line; mad: number } | null;
}

/**
 * How well computed values meet measured ones. Values of one nucleus only: different nuclei are never pooled.
 *
 * @param computed, measured in one unit, pair by pair
 * @returns null where there is no pair
 * @throws RangeError on lists of different length
 * @example againstMeasured([8.1, 37.5], [8, 38]) // mad 0.3, max 0.5 at place 1
 */
export function againstMeasured(computed: ArrayLike<number>, measured: ArrayLike<number>): Agreement | null {
  const n = computed.length;
  if (measured.length !== n) throw new RangeError(`${n} values against ${measured.length}.`);
  if (n === 0) return null;
  const d = Float64Array.from(computed, (value, i) => value - measured[i]!);
  let maxPlace = 0;
  for (let i = 1; i < n; i++) if (Math.abs(d[i]!) > Math.abs(d[maxPlace]!)) maxPlace = i;
  const line = n < FEWEST_FOR_CORRECTION ? null : fitLine(measured, computed);
  const mean = (of: (i: number) => number) => {
    let total = 0;
    for (let i = 0; i < n; i++) total += of(i);
    return total / n;
  };
  return {
    n,
    mad: mean((i) => Math.abs(d[i]!)),
    msd: mean((i) => d[i]!),
    rmsd: Math.sqrt(mean((i) => d[i]! ** 2)),
    max: Math.abs(d[maxPlace]!),
    maxPlace,
    corrected:
      line === null || line.slope === 0
        ? null
        : {
            line,
            mad: mean((i) => Math.abs((computed[i]! - line.intercept) / line.slope - measured[i]!)),
          },
  };
}

/**
 * Has the search found everything? Estimates from how often each distinct conformer was found. They speak of the
 * search's own chances, not of Boltzmann populations, and everything hangs on the RMSD tolerance.
 */

export interface Coverage {
  /** Hits in all, distinct conformers, those found once and twice. */
  hits: number;
  distinct: number;
  once: number;
  twice: number;
  /** Good-Turing, 1 - f1/n (Good, Biometrika 1953, 40, 237); what is missing is the chance that the next hit is new. */
  coverage: number;
  /** The same refined (Chao, Jost, Ecology 2012, 93, 2533). */
  refined: number;
  richness: Richness;
}

/** Lower bound of the number of conformers that the search can find (Chao1: Chao, Scand. J. Stat. 1984, 11, 265). */
export interface Richness {
  estimate: number;
  biasCorrected: number;
  /** Null where none was found twice: the variance is not known then. */
  variance: number | null;
  /** 95 %, log-normal (Chao, Biometrics 1987, 43, 783); null as the variance. */
  low: number | null;
  high: number | null;
}

/**
 * Coverage of a search and how many conformers it may find at all.
 *
 * C = 1 - f1/n; refined 1 - (f1/n) (n-1)f1/((n-1)f1 + 2 f2); Chao1 S + ((n-1)/n) f1^2/(2 f2). Without doubletons the
 * published variants with f1 - 1 stand in.
 *
 * @param found hits per distinct conformer, each at least 1
 * @returns null for an empty list
 * @throws RangeError on a count that is not a whole number above 0
 * @example samplingCoverage([5, 4, 3, 2, 2, 1, 1, 1, 1]).coverage // 0.8
 */
export function samplingCoverage(found: readonly number[]): Coverage | null {
  if (found.length === 0) return null;
  let hits = 0;
  for (const count of found) {
    if (!Number.isInteger(count) || count < 1)
      throw new RangeError(`A conformer is found at least once, got ${count}.`);
    hits += count;
  }
  const once = found.filter((count) => count === 1).length;
  const twice = found.filter((count) => count === 2).length;
  return {
    hits,
    distinct: found.length,
    once,
    twice,
    coverage: 1 - once / hits,
    refined: refinedCoverage(hits, once, twice),
    richness: chao1(found.length, hits, once, twice),
  };
}

function refinedCoverage(hits: number, once: number, twice: number): number {
  if (once === 0) return 1;
  const [top, rest] = twice > 0 ? [(hits - 1) * once, 2 * twice] : [(hits - 1) * (once - 1), 2];
  return 1 - ((once / hits) * top) / (top + rest);
}

function chao1(distinct: number, hits: number, once: number, twice: number): Richness {
  const a = (hits - 1) / hits;
  const unseen = twice > 0 ? (a * once ** 2) / (2 * twice) : (a * once * (once - 1)) / 2;
  const estimate = distinct + unseen;
  const biasCorrected = distinct + (once * (once - 1)) / (2 * (twice + 1));
  if (twice === 0 || unseen === 0) {
    // Nothing found once: no sign of a missing one, and no width.
    const settled = unseen === 0 && once === 0;
    return {
      estimate,
      biasCorrected,
      variance: settled ? 0 : null,
      low: settled ? distinct : null,
      high: settled ? distinct : null,
    };
  }
  const r = once / twice;
  const variance = twice * ((a / 2) * r ** 2 + a ** 2 * r ** 3 + (a ** 2 / 4) * r ** 4);
  const k = Math.exp(1.96 * Math.sqrt(Math.log(1 + variance / unseen ** 2)));
  return { estimate, biasCorrected, variance, low: distinct + unseen / k, high: distinct + unseen * k };
}

/**
 * Distinct conformers that so many hits would have found, on average (rarefaction; Colwell et al., J. Plant Ecol. 2012,
 * 5, 3): S(m) = S - sum_i C(n - n_i, m)/C(n, m). Beyond the hits there are it extrapolates with Chao1, to twice as many
 * at most: S(n + m) = S + f0 [1 - (1 - f1/(n f0 + f1))^m].
 *
 * @param found hits per distinct conformer
 * @param hits from 0 to twice their sum; a fraction is allowed for drawing
 * @throws RangeError outside of that
 * @example rarefied([5, 4, 3, 2, 2, 1, 1, 1, 1], 10) // 6.361455
 */
export function rarefied(found: readonly number[], hits: number): number {
  const coverage = samplingCoverage(found);
  if (coverage === null) return 0;
  const n = coverage.hits;
  if (!(hits >= 0 && hits <= 2 * n)) throw new RangeError(`Hits from 0 to ${2 * n}, found ${hits}.`);
  const distinct = coverage.distinct;
  if (hits > n) {
    const unseen = coverage.richness.estimate - distinct;
    if (unseen === 0) return distinct;
    return distinct + unseen * (1 - (1 - coverage.once / (n * unseen + coverage.once)) ** (hits - n));
  }
  let missed = 0;
  for (const count of found) {
    if (n - count >= hits) missed += Math.exp(logChoose(n - count, hits) - logChoose(n, hits));
  }
  return distinct - missed;
}

function logChoose(n: number, k: number): number {
  return logGamma(n + 1) - logGamma(k + 1) - logGamma(n - k + 1);
}

/** Coefficients of Lanczos (J. SIAM Numer. Anal. B 1964, 1, 86), g = 7, nine terms; from memory. Good to 1e-13. */
const LANCZOS = [
  0.99999999999980993, 676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059,
  12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7,
];

/** ln of the gamma function for x of at least 1. */
function logGamma(x: number): number {
  const y = x - 1;
  let series = LANCZOS[0]!;
  for (let k = 1; k < LANCZOS.length; k++) series += LANCZOS[k]! / (y + k);
  const t = y + 7.5;
  return 0.5 * Math.log(2 * Math.PI) + (y + 0.5) * Math.log(t) - t + Math.log(series);
}

/** Two searches of one molecule against each other. */
export interface TwoSearches {
  /** Distinct conformers of each, and those that both found. */
  first: number;
  second: number;
  both: number;
  /** Conformers that exist, by capture and recapture (Chapman, Univ. Calif. Publ. Stat. 1951, 1, 131; from memory). */
  estimate: number;
}

/**
 * Capture and recapture: (n1 + 1)(n2 + 1)/(m + 1) - 1. A lower bound where both searches favour the same conformers.
 *
 * @throws RangeError on a count below 0 or more in common than either found
 * @example twoSearches(30, 28, 21).estimate // 39.863636
 */
export function twoSearches(first: number, second: number, both: number): TwoSearches {
  if (!(both >= 0 && both <= Math.min(first, second))) {
    throw new RangeError(`${both} conformers in common of ${first} and ${second}.`);
  }
  return { first, second, both, estimate: ((first + 1) * (second + 1)) / (both + 1) - 1 };
}

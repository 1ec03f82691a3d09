import { generator } from "../stats/random.ts";
import { thermalEnergyKcal } from "../units.ts";

/** Draws of a Monte Carlo where none are asked for: our own starting value. */
export const DRAWS = 10_000;

/** How wrong the energies may be: a normal error about each, from one level of theory. */
export interface EnergyError {
  /** Standard deviation, kcal/mol: one for all conformers or one each; 0 means exact. */
  sigma: number | ArrayLike<number>;
  /** The same correlation between any two errors, 0 (default) up to below 1. A shared error cancels in populations. */
  correlation?: number;
  /** In place of `correlation`: lower triangle of the correlation matrix (`choleskyFactor`), n x n. */
  factor?: Float64Array | null;
}

export interface DrawInput {
  /** kcal/mol, any common zero. */
  energies: ArrayLike<number>;
  /** Copies that each conformer stands for; 1 each where left out. */
  weights?: ArrayLike<number>;
  temperatureK: number;
  error: EnergyError;
  /** Even; draws 2k and 2k + 1 are an antithetic pair. */
  draws?: number;
  /** Whole number from 0 to 2^32 - 1; stored with what is made of it. */
  seed: number;
}

/**
 * Draws true energies e_i + eps_i and hands each draw's populations to `visit` (methods of uncertainty: JCGM 101:2008).
 *
 * Errors are normal; every second draw takes the same errors with the other sign (antithetic pairs). The random numbers
 * are taken in the order of the conformers, so that seed and input fix every digit.
 *
 * @param visit populations (fractions), energies of this draw (kcal/mol from the lowest computed one), number of the draw from 0.
 *   Both arrays are used again for the next draw: copy what is to stay.
 * @throws RangeError on empty input, unequal lengths, a sigma below 0, a weight or temperature not above zero, an odd
 *   number of draws, or a correlation outside [0, 1)
 */
export function forEachDraw(
  input: DrawInput,
  visit: (populations: Float64Array, energies: Float64Array, draw: number) => void,
): void {
  const { base, sigmas, logWeights, draws } = prepare(input);
  const n = base.length;
  const rt = thermalEnergyKcal(input.temperatureK);
  const { normal } = generator(input.seed);
  const rho = input.error.correlation ?? 0;
  const factor = input.error.factor ?? null;
  const own = Math.sqrt(1 - rho);
  const shared = Math.sqrt(rho);
  const z = new Float64Array(n);
  const shift = new Float64Array(n);
  const energies = new Float64Array(n);
  const populations = new Float64Array(n);
  for (let pair = 0; pair < draws / 2; pair++) {
    for (let i = 0; i < n; i++) z[i] = normal();
    if (factor) multiply(factor, z, shift);
    else {
      const common = rho > 0 ? shared * normal() : 0;
      for (let i = 0; i < n; i++) shift[i] = own * z[i]! + common;
    }
    for (let side = 0; side < 2; side++) {
      const sign = side === 0 ? 1 : -1;
      for (let i = 0; i < n; i++) energies[i] = base[i]! + sign * sigmas[i]! * shift[i]!;
      weighInto(energies, logWeights, rt, populations);
      visit(populations, energies, 2 * pair + side);
    }
  }
}

function prepare(input: DrawInput) {
  const n = input.energies.length;
  if (n === 0) throw new RangeError("No conformer to draw energies of.");
  const { sigma, correlation = 0, factor } = input.error;
  const sigmas = typeof sigma === "number" ? new Float64Array(n).fill(sigma) : Float64Array.from(sigma);
  const weights = input.weights ?? new Float64Array(n).fill(1);
  if (sigmas.length !== n || weights.length !== n) {
    throw new RangeError(`${n} energies, ${sigmas.length} errors and ${weights.length} weights.`);
  }
  if (factor && factor.length !== n * n) throw new RangeError(`A factor of ${n} conformers is ${n} x ${n}.`);
  if (!(correlation >= 0 && correlation < 1)) {
    throw new RangeError(`A correlation of errors lies from 0 to below 1, found ${correlation}.`);
  }
  const draws = input.draws ?? DRAWS;
  if (!Number.isInteger(draws / 2) || draws < 2) throw new RangeError(`Draws come in pairs, found ${draws}.`);
  let lowest = Number.POSITIVE_INFINITY;
  for (let i = 0; i < n; i++) {
    if (!Number.isFinite(input.energies[i]!)) throw new RangeError(`Energy ${i + 1} is not a finite number.`);
    if (!(weights[i]! > 0)) throw new RangeError(`Weight ${i + 1} is not above zero.`);
    if (!(sigmas[i]! >= 0 && Number.isFinite(sigmas[i]!)))
      throw new RangeError(`Error ${i + 1} lies below zero.`);
    lowest = Math.min(lowest, input.energies[i]!);
  }
  return {
    draws,
    sigmas,
    base: Float64Array.from(input.energies, (e) => e - lowest),
    logWeights: Float64Array.from(weights, Math.log),
  };
}

function multiply(factor: Float64Array, z: Float64Array, out: Float64Array): void {
  const n = z.length;
  for (let i = 0; i < n; i++) {
    let total = 0;
    for (let k = 0; k <= i; k++) total += factor[i * n + k]! * z[k]!;
    out[i] = total;
  }
}

/** Log-sum-exp without the thermodynamics of `weigh`: a draw is one of ten thousand. */
function weighInto(energies: Float64Array, logWeights: Float64Array, rt: number, out: Float64Array): void {
  const n = energies.length;
  let top = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < n; i++) {
    const x = logWeights[i]! - energies[i]! / rt;
    out[i] = x;
    if (x > top) top = x;
  }
  let total = 0;
  for (let i = 0; i < n; i++) {
    const w = Math.exp(out[i]! - top);
    out[i] = w;
    total += w;
  }
  for (let i = 0; i < n; i++) out[i] = out[i]! / total;
}

import { windowToCarry } from "../format.ts";
import { type Bootstrap, bootstrap } from "../stats/bootstrap.ts";
import { weigh } from "../thermo/boltzmann.ts";
import { keptWithin, narrowestWindow, nextWindow, windowCurve } from "./window.ts";

/** One molecule that has both levels. */
export interface PooledMolecule {
  /** kcal/mol, any zero; conformers that have both energies. */
  level: ArrayLike<number>;
  reference: ArrayLike<number>;
  weights?: ArrayLike<number>;
}

export interface PooledWindow {
  /** Share of each molecule's reference population that is to be kept, and of the molecules for which it must be. */
  share: number;
  ofMolecules: number;
  /** Window that does it, kcal/mol. */
  kcal: number;
  /** The same as it is printed, rounded up: what is said of the common window holds for these digits. */
  carriedKcal: number;
  /** Molecules for which that window keeps the share, of all. */
  reached: number;
  molecules: number;
  /**
   * One a molecule, in the order given: the window it needs by itself, the one that would take in a conformer more, and
   * what the common one keeps.
   */
  each: { kcal: number; next: number; count: number; of: number; kept: number; keptCount: number }[];
}

/**
 * The window at the cheap level that keeps a share of the reference population for most molecules of a series
 * ("95 % for 9 of 10"): the k-th smallest of the windows that each needs, k = ceil(ofMolecules x molecules).
 *
 * @throws RangeError without a molecule, or a share not in (0, 1]
 * @example pooledWindow(molecules, { share: 0.95, ofMolecules: 0.9, temperatureK: 298.15 }).kcal
 */
export function pooledWindow(
  molecules: readonly PooledMolecule[],
  { share, ofMolecules, temperatureK }: { share: number; ofMolecules: number; temperatureK: number },
): PooledWindow {
  if (molecules.length === 0) throw new RangeError("No molecule has both levels.");
  for (const part of [share, ofMolecules]) {
    if (!(part > 0 && part <= 1)) throw new RangeError(`A share lies above 0 and up to 1, found ${part}.`);
  }
  const curves = molecules.map((molecule) => curveOf(molecule, temperatureK));
  const needed = curves.map((curve) => narrowestWindow(curve, share));
  const kcal = pickWindow(
    needed.map((one) => one.kcal),
    ofMolecules,
  );
  const carriedKcal = windowToCarry(kcal);
  const each = curves.map((curve, m) => {
    const within = keptWithin(curve, carriedKcal);
    return {
      kcal: needed[m]!.kcal,
      next: nextWindow(curve, needed[m]!.kcal),
      count: needed[m]!.count,
      of: molecules[m]!.level.length,
      kept: within.kept,
      keptCount: within.count,
    };
  });
  return {
    share,
    ofMolecules,
    kcal,
    carriedKcal,
    reached: each.filter((one) => one.kcal <= carriedKcal).length,
    molecules: molecules.length,
    each,
  };
}

function curveOf(molecule: PooledMolecule, temperatureK: number) {
  const { level, reference } = molecule;
  const weights = molecule.weights ?? new Float64Array(level.length).fill(1);
  return windowCurve(level, weigh(reference, weights, temperatureK).populations);
}

function pickWindow(needed: readonly number[], ofMolecules: number): number {
  const sorted = Float64Array.from(needed).sort();
  // 0.9 x 10 is 9.000000000000002 in doubles of some products: a trifle must not ask for a tenth molecule.
  const k = Math.max(1, Math.ceil(ofMolecules * sorted.length - 1e-9));
  return sorted[k - 1]!;
}

/**
 * Interval of the pooled window: molecules are drawn with replacement, then the conformers of each.
 *
 * @throws RangeError as `pooledWindow`
 */
export function pooledWindowInterval(
  molecules: readonly PooledMolecule[],
  options: { share: number; ofMolecules: number; temperatureK: number; resamples?: number; seed: number },
): Bootstrap<"kcal"> {
  const { share, ofMolecules, temperatureK } = options;
  return bootstrap(
    molecules.length,
    ["kcal"],
    (places, draw) => {
      const needed = Array.from(places, (m) => {
        const { level, reference, weights } = molecules[m]!;
        const n = level.length;
        const chosen = Int32Array.from({ length: n }, () => draw.below(n));
        const pick = (list: ArrayLike<number>) => Float64Array.from(chosen, (i) => list[i]!);
        const curve = curveOf(
          { level: pick(level), reference: pick(reference), weights: weights ? pick(weights) : undefined },
          temperatureK,
        );
        return narrowestWindow(curve, share).kcal;
      });
      return { kcal: pickWindow(needed, ofMolecules) };
    },
    options,
  );
}

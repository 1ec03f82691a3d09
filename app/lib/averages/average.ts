import { LEAST_RESULTANT } from "../measure/circular.ts";
import { circularDeviation, DEGREES_A_TURN, turnOf } from "./angle.ts";
import type { AverageRule } from "./rule.ts";

/** Below this share of the population nothing is averaged (our choice; no source). */
export const LEAST_COVERED = 0.9;
/** Rounding must not refuse exactly 90 %. */
const SLACK = 1e-12;

/** One quantity over the conformers of a distinct set. */
export interface Quantity {
  rule: AverageRule;
  /** As written; says how an angle goes round. Degrees where it is none of an angle. */
  unit?: string | null;
  /** By position in the set; null is missing, never 0. */
  values: readonly (number | null)[];
}

/** What else of the set bears on averages. */
export interface SetFacts {
  /** Mirror factors, 1 or 2, by position. */
  degeneracies: ArrayLike<number>;
  /** True where the molecule is achiral and each conformer stands for its mirror image too. */
  mirrorMerged: boolean;
}

export interface Average {
  /** Null where it is not averaged or has no value; `state` says why. */
  value: number | null;
  /** Of the shapes: standard deviation of the conformers' values about their linear mean; circular: sqrt(-2 ln R) in the unit of the angle. */
  spread: number | null;
  /** Share of the population whose conformers have a value, 0 to 1. */
  covered: number;
  state: "averaged" | "not-covered" | "undefined" | "zero-distance";
  /** Mean resultant length of a circular quantity, else null. */
  resultant: number | null;
  /** Symmetry alone fixes the value, whatever the energies. */
  fixed: boolean;
}

/**
 * A quantity as sums that are linear in the populations: value = g(sum p f / sum p). Every rule becomes one or two
 * such sums, so that Monte Carlo draws, contributions and temperatures share one path.
 */
export interface Moments {
  rule: AverageRule;
  /** What one turn is in the unit of the values: 360, 2 pi. Only a circular quantity goes round. */
  turn: number;
  first: Float64Array;
  /** Sine part of a circular quantity, else null. */
  second: Float64Array | null;
  present: Uint8Array;
  values: Float64Array;
  zeroDistance: boolean;
  fixed: boolean;
  /** Values enter half at A and half at -A. */
  mirrored: Uint8Array;
}

/**
 * Prepares a quantity: linear f = A; r^-6 and r^-3 the powers; root mean square A^2; circular cos t and sin t; and
 * mirror images at once: a conformer of degeneracy 2 enters an angle half at t, half at -t, and what changes sign in
 * the mirror image is 0 throughout an achiral molecule.
 *
 * @throws RangeError on lists of different length or a value that is not finite
 */
export function momentsOf(quantity: Quantity, facts: SetFacts): Moments {
  const n = quantity.values.length;
  if (facts.degeneracies.length !== n) {
    throw new RangeError(`${n} values but ${facts.degeneracies.length} degeneracies.`);
  }
  const { rule } = quantity;
  const made: Moments = {
    rule,
    turn: turnOf(quantity.unit ?? null) ?? DEGREES_A_TURN,
    first: new Float64Array(n),
    second: rule === "circular" ? new Float64Array(n) : null,
    present: new Uint8Array(n),
    values: new Float64Array(n),
    mirrored: new Uint8Array(n),
    zeroDistance: false,
    fixed: rule === "odd" && facts.mirrorMerged,
  };
  for (let i = 0; i < n; i++) {
    const value = quantity.values[i] ?? null;
    if (value === null) continue;
    if (!Number.isFinite(value)) throw new RangeError(`Value ${i + 1} is not a finite number.`);
    made.present[i] = 1;
    made.values[i] = value;
    const paired = facts.degeneracies[i] === 2;
    made.mirrored[i] = (rule === "circular" && paired) || made.fixed ? 1 : 0;
    fill(made, i, value, facts.mirrorMerged || paired);
  }
  return made;
}

function fill(made: Moments, i: number, value: number, bothHands: boolean): void {
  switch (made.rule) {
    case "linear":
      made.first[i] = value;
      return;
    case "odd":
      made.first[i] = bothHands ? 0 : value;
      return;
    case "rms":
      made.first[i] = value * value;
      return;
    case "r-6":
    case "r-3":
      made.first[i] = value > 0 ? value ** (made.rule === "r-6" ? -6 : -3) : Number.POSITIVE_INFINITY;
      // A distance so small that its power is beyond any number is none.
      if (made.first[i] === Number.POSITIVE_INFINITY) {
        made.first[i] = 0;
        made.zeroDistance = true;
      }
      return;
    case "circular": {
      const angle = value / perRadian(made);
      made.first[i] = Math.cos(angle);
      if (made.second) made.second[i] = made.mirrored[i] ? 0 : Math.sin(angle);
    }
  }
}

/** Units of an angle in one radian. */
export function perRadian({ turn }: Pick<Moments, "turn">): number {
  return turn / (2 * Math.PI);
}

/** The value behind normalised sums; null for an angle whose resultant is below 0.1. */
export function valueBehind(
  moments: Pick<Moments, "rule" | "turn">,
  first: number,
  second: number,
): number | null {
  switch (moments.rule) {
    case "linear":
    case "odd":
      return first;
    case "rms":
      return Math.sqrt(Math.max(0, first));
    case "r-6":
      return first ** (-1 / 6);
    case "r-3":
      return first ** (-1 / 3);
    case "circular": {
      if (Math.hypot(first, second) < LEAST_RESULTANT) return null;
      const radians = Math.atan2(second, first);
      // Within rounding of -180° is 180°: the mean of 170° and -170° must not jump between the two ends.
      return radians <= -Math.PI + 1e-11 ? moments.turn / 2 : radians * perRadian(moments);
    }
  }
}

/** Sums over the conformers that have a value: sum p, sum p f, sum p g, in the order of the set. */
export function sums(
  moments: Moments,
  populations: ArrayLike<number>,
  without = -1,
): [number, number, number] {
  let share = 0;
  let first = 0;
  let second = 0;
  for (let i = 0; i < populations.length; i++) {
    if (moments.present[i] === 0 || i === without) continue;
    const p = populations[i]!;
    share += p;
    first += p * moments.first[i]!;
    if (moments.second) second += p * moments.second[i]!;
  }
  return [share, first, second];
}

/**
 * Average, spread and covered population of a prepared quantity. Missing values are left out and the rest is
 * renormalised; below 90 % covered nothing is averaged.
 *
 * <A> = sum p A / sum p; spread sqrt(sum p (A - <A>)^2 / sum p); r^-6: (sum p r^-6)^(-1/6) (conformers exchange slower
 * than the molecule tumbles); r^-3 likewise (faster: Tropp, J. Chem. Phys. 1980, 72, 6035, from memory); circular:
 * z = sum p exp(i t), mean arg z, R = |z|.
 *
 * @param populations fractions, one a conformer
 * @example averageOf(momentsOf({ rule: "r-6", values: [2.5, 4] }, facts), [0.5, 0.5]).value // 2.779208
 */
export function averageOf(moments: Moments, populations: ArrayLike<number>): Average {
  const covered = coveredShare(moments, populations);
  const none = { value: null, spread: null, covered, resultant: null, fixed: false };
  if (covered < LEAST_COVERED - SLACK) return { ...none, state: "not-covered" };
  if (moments.zeroDistance) return { ...none, state: "zero-distance" };
  const [share, first, second] = sums(moments, populations);
  const value = valueBehind(moments, first / share, second / share);
  const circular = moments.rule === "circular";
  const resultant = circular ? Math.min(1, Math.hypot(first, second) / share) : null;
  return {
    value,
    // About a mean that is undefined there is no spread either: at R = 0 its formula gives the logarithm of a rounding.
    spread:
      resultant === null
        ? spreadOf(moments, populations, share)
        : value === null
          ? null
          : circularSpread(moments, populations, { share, resultant }),
    covered,
    state: value === null ? "undefined" : "averaged",
    resultant,
    fixed: moments.fixed,
  };
}

/** Share of the population with a value; exactly 1 where none is missing. */
export function coveredShare(moments: Moments, populations: ArrayLike<number>): number {
  let all = 0;
  let having = 0;
  let missing = false;
  for (let i = 0; i < populations.length; i++) {
    all += populations[i]!;
    if (moments.present[i] === 1) having += populations[i]!;
    else missing = true;
  }
  if (populations.length === 0 || having === 0) return 0;
  return missing ? Math.min(1, having / all) : 1;
}

function spreadOf(moments: Moments, populations: ArrayLike<number>, share: number): number {
  let mean = 0;
  for (let i = 0; i < populations.length; i++) {
    if (moments.present[i] === 1 && moments.mirrored[i] === 0) mean += populations[i]! * moments.values[i]!;
  }
  mean /= share;
  let variance = 0;
  for (let i = 0; i < populations.length; i++) {
    if (moments.present[i] === 0) continue;
    const value = moments.values[i]!;
    // Half at A and half at -A about a mean of 0 give A^2.
    const square = moments.mirrored[i] === 1 ? value * value + mean * mean : (value - mean) ** 2;
    variance += populations[i]! * square;
  }
  return Math.sqrt(variance / share);
}

function circularSpread(
  moments: Moments,
  populations: ArrayLike<number>,
  { share, resultant }: { share: number; resultant: number },
): number | null {
  const unit = perRadian(moments);
  const shortOf = () => {
    const reference = moments.values[moments.present.indexOf(1)]! / unit;
    let [x, y, short] = [0, 0, 0];
    const walk = (visit: (angle: number, weight: number) => void) => {
      for (let i = 0; i < populations.length; i++) {
        if (moments.present[i] === 0) continue;
        const paired = moments.mirrored[i] === 1;
        const [angle, p] = [moments.values[i]! / unit, populations[i]! / share / (paired ? 2 : 1)];
        visit(angle - reference, p);
        if (paired) visit(-angle - reference, p);
      }
    };
    walk((angle, p) => {
      x += p * Math.cos(angle);
      y += p * Math.sin(angle);
    });
    const mean = Math.atan2(y, x);
    walk((angle, p) => {
      short += p * 2 * Math.sin((angle - mean) / 2) ** 2;
    });
    return short;
  };
  const deviation = circularDeviation(resultant, shortOf);
  return deviation === null ? null : deviation * unit;
}

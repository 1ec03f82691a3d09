import { mean } from "./moments.ts";
import { midRanks } from "./ranks.ts";

/**
 * Pearson's correlation of two lists.
 *
 * @returns null where one of them is constant (the quotient is 0/0 then) or shorter than 2
 * @throws RangeError on unequal lengths
 * @example pearson([0, 1, 2], [1, 3, 5]) // 1
 */
export function pearson(x: ArrayLike<number>, y: ArrayLike<number>): number | null {
  sameLength(x, y);
  if (x.length < 2 || isConstant(x) || isConstant(y)) return null;
  const mx = mean(x);
  const my = mean(y);
  let sxy = 0;
  let sxx = 0;
  let syy = 0;
  for (let i = 0; i < x.length; i++) {
    const dx = x[i]! - mx;
    const dy = y[i]! - my;
    sxy += dx * dy;
    sxx += dx * dx;
    syy += dy * dy;
  }
  // A list against itself is 1 without the rounding that the roots would leave.
  if (sxy === sxx && sxy === syy) return 1;
  const scale = Math.sqrt(sxx) * Math.sqrt(syy);
  // Values a rounding apart from each other can leave nothing of the squares.
  return scale > 0 ? clamp(sxy / scale) : null;
}

/**
 * Spearman's rank correlation: Pearson's of the mid-ranks.
 *
 * @example spearman([12, 2, 1, 12, 2], [1, 4, 7, 1, 0]) // -0.5407
 */
export function spearman(x: ArrayLike<number>, y: ArrayLike<number>): number | null {
  sameLength(x, y);
  const [a, b] = [midRanks(x), midRanks(y)];
  const rho = pearson(a, b);
  if (rho === null) return null;
  // Equal and opposite orders are 1 and -1 without the rounding that the sums would leave.
  if (a.every((rank, i) => rank === b[i])) return 1;
  return a.every((rank, i) => rank + b[i]! === a.length + 1) ? -1 : rho;
}

/**
 * Kendall's tau-b: (C - D)/sqrt((n0 - n1)(n0 - n2)) with C, D the concordant and discordant pairs, n0 = n(n - 1)/2 and
 * n1, n2 the pairs tied in x and in y (Kendall, Biometrika 1945, 33, 239). Discordant pairs are counted as exchanges of
 * a merge sort, O(n log n) (Knight, J. Am. Stat. Assoc. 1966, 61, 436).
 *
 * @returns null where one list is constant or shorter than 2
 * @throws RangeError on unequal lengths
 * @example kendallTauB([12, 2, 1, 12, 2], [1, 4, 7, 1, 0]) // -0.4714
 */
export function kendallTauB(x: ArrayLike<number>, y: ArrayLike<number>): number | null {
  sameLength(x, y);
  const n = x.length;
  if (n < 2 || isConstant(x) || isConstant(y)) return null;
  const order = Array.from({ length: n }, (_, i) => i).sort((a, b) => x[a]! - x[b]! || y[a]! - y[b]!);
  const ys = Float64Array.from(order, (i) => y[i]!);
  let tiedX = 0;
  let tiedBoth = 0;
  let runX = 1;
  let runBoth = 1;
  for (let k = 1; k <= n; k++) {
    const sameX = k < n && x[order[k]!] === x[order[k - 1]!];
    const sameBoth = sameX && ys[k] === ys[k - 1];
    if (sameX) runX++;
    else {
      tiedX += pairsOf(runX);
      runX = 1;
    }
    if (sameBoth) runBoth++;
    else {
      tiedBoth += pairsOf(runBoth);
      runBoth = 1;
    }
  }
  const discordant = countExchanges(ys);
  let tiedY = 0;
  let runY = 1;
  // The counting has sorted ys.
  for (let k = 1; k <= n; k++) {
    if (k < n && ys[k] === ys[k - 1]) runY++;
    else {
      tiedY += pairsOf(runY);
      runY = 1;
    }
  }
  const all = pairsOf(n);
  const concordant = all - tiedX - tiedY + tiedBoth - discordant;
  const [untiedX, untiedY] = [all - tiedX, all - tiedY];
  // With as many ties on both sides the root is the number itself, and equal rankings give 1 to the last digit.
  const scale = untiedX === untiedY ? untiedX : Math.sqrt(untiedX) * Math.sqrt(untiedY);
  return clamp((concordant - discordant) / scale);
}

function pairsOf(n: number): number {
  return (n * (n - 1)) / 2;
}

/** Pairs that stand the wrong way round; sorts the list. */
function countExchanges(list: Float64Array): number {
  let from: Float64Array = list;
  let to: Float64Array = new Float64Array(list.length);
  let exchanges = 0;
  for (let width = 1; width < list.length; width *= 2) {
    for (let start = 0; start < list.length; start += 2 * width) {
      const middle = Math.min(start + width, list.length);
      const end = Math.min(start + 2 * width, list.length);
      let left = start;
      let right = middle;
      for (let k = start; k < end; k++) {
        if (left < middle && (right >= end || from[left]! <= from[right]!)) to[k] = from[left++]!;
        else {
          exchanges += middle - left;
          to[k] = from[right++]!;
        }
      }
    }
    [from, to] = [to, from];
  }
  if (from !== list) list.set(from);
  return exchanges;
}

/** Whether every value equals the first. */
export function isConstant(values: ArrayLike<number>): boolean {
  for (let i = 1; i < values.length; i++) if (values[i] !== values[0]) return false;
  return true;
}

/** A quotient of rounded sums may end a rounding beyond 1. */
function clamp(value: number): number {
  return Math.max(-1, Math.min(1, value));
}

function sameLength(x: ArrayLike<number>, y: ArrayLike<number>): void {
  if (x.length !== y.length) throw new RangeError(`${x.length} values against ${y.length}.`);
}

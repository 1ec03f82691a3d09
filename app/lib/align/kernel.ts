/**
 * Superposition of two labelled point sets: the one 64-bit path of the product. Whatever decides faster elsewhere,
 * every RMSD that is stored or shown comes from here, with sums in a fixed order, so that the same bytes come out.
 *
 * With centred sets x and y, M = sum x_i y_i^T, F = |M|^2 and C = |cof M|^2 the largest root l of
 * P(l) = l^4 - 2 F l^2 - 8 det(M) l + F^2 - 4 C gives W RMSD^2 = E_x + E_y - 2 l over all proper rotations
 * (Horn, J. Opt. Soc. Am. A 1987, 4, 629; Theobald, Acta Cryst. A 2005, 61, 478). The mirror image of one set is -M.
 *
 * Sets are packed [atom][x, y, z]; weights are folded in when a set is centred (coordinates times the square root of
 * the weight), so that nothing after that knows of them.
 */

/** Below this share of (E_x + E_y)/W the difference E_x + E_y - 2 l has lost its digits: sum the residuals instead. */
const CANCELLATION = 1e-8;
/** P'(l)/l^3 under which the root is nearly double (linear sets and their like) and Newton too blunt. */
const NEARLY_DOUBLE = 1e-2;
const NEWTON_STEPS = 50;
/** Residuals of this share of E_x + E_y are the rounding of the rotation itself: equal sets have RMSD 0. */
const DOUBLE_ROUNDING = 1e-30;

/**
 * Copies chosen atoms to `target`, moved so that their centroid is the origin, times the square root of the weights.
 *
 * @param source packed coordinates in Å; `from` is the index of the frame's first number
 * @param atoms atoms of the frame in the order wanted
 * @param weights one a chosen atom, above zero; all 1 when left out
 * @returns E = sum w |x|^2 in Å^2
 * @example centreInto(frames, 0, atoms, target, 0)
 */
export function centreInto(
  source: Float64Array,
  from: number,
  atoms: Int32Array,
  target: Float64Array,
  at: number,
  weights?: ArrayLike<number>,
): number {
  const n = atoms.length;
  let total = 0;
  let cx = 0;
  let cy = 0;
  let cz = 0;
  for (let k = 0; k < n; k++) {
    const w = weights ? weights[k]! : 1;
    const s = from + 3 * atoms[k]!;
    total += w;
    cx += w * source[s]!;
    cy += w * source[s + 1]!;
    cz += w * source[s + 2]!;
  }
  cx /= total;
  cy /= total;
  cz /= total;
  let e = 0;
  for (let k = 0; k < n; k++) {
    const f = weights ? Math.sqrt(weights[k]!) : 1;
    const s = from + 3 * atoms[k]!;
    const t = at + 3 * k;
    const x = f * (source[s]! - cx);
    const y = f * (source[s + 1]! - cy);
    const z = f * (source[s + 2]! - cz);
    target[t] = x;
    target[t + 1] = y;
    target[t + 2] = z;
    e += x * x + y * y + z * z;
  }
  return e;
}

/**
 * M = sum over k of x_k y_{map(k)}^T, row major, into `m` at `at`.
 *
 * @param map partner in y of each atom of x; null for the same number
 */
export function covarianceInto(
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  n: number,
  map: Int32Array | null,
  m: Float64Array,
  at: number,
): void {
  let m0 = 0;
  let m1 = 0;
  let m2 = 0;
  let m3 = 0;
  let m4 = 0;
  let m5 = 0;
  let m6 = 0;
  let m7 = 0;
  let m8 = 0;
  for (let k = 0; k < n; k++) {
    const i = xo + 3 * k;
    const j = yo + 3 * (map ? map[k]! : k);
    const a = x[i]!;
    const b = x[i + 1]!;
    const c = x[i + 2]!;
    const p = y[j]!;
    const q = y[j + 1]!;
    const r = y[j + 2]!;
    m0 += a * p;
    m1 += a * q;
    m2 += a * r;
    m3 += b * p;
    m4 += b * q;
    m5 += b * r;
    m6 += c * p;
    m7 += c * q;
    m8 += c * r;
  }
  m[at] = m0;
  m[at + 1] = m1;
  m[at + 2] = m2;
  m[at + 3] = m3;
  m[at + 4] = m4;
  m[at + 5] = m5;
  m[at + 6] = m6;
  m[at + 7] = m7;
  m[at + 8] = m8;
}

/**
 * True only when the largest root of M certainly lies below `l`, without finding it: all four roots are real, so that
 * is so exactly when l > 0 and P, P', P'' are all above zero there. Rounding is held off by a margin: near the root
 * the answer is false and the value has to decide.
 *
 * @example rootBelow(m, 0, (ex + ey - n * tolerance ** 2) / 2) // true: the RMSD is above the tolerance
 */
export function rootBelow(m: Float64Array, at: number, l: number): boolean {
  if (!(l > 0)) return false;
  const a = m[at]!;
  const b = m[at + 1]!;
  const c = m[at + 2]!;
  const d = m[at + 3]!;
  const e = m[at + 4]!;
  const f = m[at + 5]!;
  const g = m[at + 6]!;
  const h = m[at + 7]!;
  const i = m[at + 8]!;
  const norm = a * a + b * b + c * c + d * d + e * e + f * f + g * g + h * h + i * i;
  const square = l * l;
  // All roots lie within sqrt(3 F).
  if (square > 3.0001 * norm) return true;
  if (12 * square <= 4 * norm) return false;
  const c0 = e * i - f * h;
  const c1 = f * g - d * i;
  const c2 = d * h - e * g;
  const det = a * c0 + b * c1 + c * c2;
  const margin = 1e-13 * norm * norm;
  if (4 * l * (square - norm) - 8 * det <= 1e-13 * norm * l) return false;
  const c3 = c * h - b * i;
  const c4 = a * i - c * g;
  const c5 = b * g - a * h;
  const c6 = b * f - c * e;
  const c7 = c * d - a * f;
  const c8 = a * e - b * d;
  const cofactors = c0 * c0 + c1 * c1 + c2 * c2 + c3 * c3 + c4 * c4 + c5 * c5 + c6 * c6 + c7 * c7 + c8 * c8;
  const difference = square - norm;
  return difference * difference - 8 * det * l - 4 * cofactors > margin;
}

/**
 * Largest root of P by Newton from above; by the eigenvalue of the 4x4 matrix where the root is nearly double.
 *
 * @param ceiling a bound from above where one is known: (E_x + E_y)/2
 * @returns Å^2, 0 for M = 0
 */
export function largestRoot(m: Float64Array, at: number, ceiling = Number.POSITIVE_INFINITY): number {
  const a = m[at]!;
  const b = m[at + 1]!;
  const c = m[at + 2]!;
  const d = m[at + 3]!;
  const e = m[at + 4]!;
  const f = m[at + 5]!;
  const g = m[at + 6]!;
  const h = m[at + 7]!;
  const i = m[at + 8]!;
  const norm = a * a + b * b + c * c + d * d + e * e + f * f + g * g + h * h + i * i;
  if (norm === 0) return 0;
  const c0 = e * i - f * h;
  const c1 = f * g - d * i;
  const c2 = d * h - e * g;
  const c3 = c * h - b * i;
  const c4 = a * i - c * g;
  const c5 = b * g - a * h;
  const c6 = b * f - c * e;
  const c7 = c * d - a * f;
  const c8 = a * e - b * d;
  const det = a * c0 + b * c1 + c * c2;
  const cofactors = c0 * c0 + c1 * c1 + c2 * c2 + c3 * c3 + c4 * c4 + c5 * c5 + c6 * c6 + c7 * c7 + c8 * c8;
  const constant = norm * norm - 4 * cofactors;
  let l = Math.min(ceiling, Math.sqrt(3 * norm));
  let slope = 0;
  for (let step = 0; step < NEWTON_STEPS; step++) {
    const square = l * l;
    slope = 4 * l * (square - norm) - 8 * det;
    const value = square * (square - 2 * norm) - 8 * det * l + constant;
    if (!(slope > 0)) break;
    const change = value / slope;
    l -= change;
    if (Math.abs(change) <= 1e-15 * l) break;
  }
  if (slope > NEARLY_DOUBLE * l * l * l) return l;
  return eigenSystem(m, at);
}

// Scratch of the eigenvalue solver: symmetric 4x4 matrix and its vectors.
const K = new Float64Array(16);
const V = new Float64Array(16);
/** Quaternion (w, x, y, z) of the last eigenSystem call. */
const Q = new Float64Array(4);

/** Largest eigenvalue of Horn's matrix by Jacobi rotations; its vector, the quaternion of the best rotation, into Q. */
function eigenSystem(m: Float64Array, at: number): number {
  const xx = m[at]!;
  const xy = m[at + 1]!;
  const xz = m[at + 2]!;
  const yx = m[at + 3]!;
  const yy = m[at + 4]!;
  const yz = m[at + 5]!;
  const zx = m[at + 6]!;
  const zy = m[at + 7]!;
  const zz = m[at + 8]!;
  K[0] = xx + yy + zz;
  K[5] = xx - yy - zz;
  K[10] = -xx + yy - zz;
  K[15] = -xx - yy + zz;
  K[1] = K[4] = yz - zy;
  K[2] = K[8] = zx - xz;
  K[3] = K[12] = xy - yx;
  K[6] = K[9] = xy + yx;
  K[7] = K[13] = zx + xz;
  K[11] = K[14] = yz + zy;
  V.fill(0);
  V[0] = V[5] = V[10] = V[15] = 1;
  for (let sweep = 0; sweep < 30; sweep++) {
    let off = 0;
    let diagonal = 0;
    for (let p = 0; p < 4; p++) {
      diagonal += K[5 * p]! * K[5 * p]!;
      for (let q = p + 1; q < 4; q++) off += K[4 * p + q]! * K[4 * p + q]!;
    }
    if (off <= 1e-34 * (off + diagonal)) break;
    for (let p = 0; p < 3; p++) for (let q = p + 1; q < 4; q++) rotatePlane(p, q);
  }
  let best = 0;
  for (let p = 1; p < 4; p++) if (K[5 * p]! > K[5 * best]!) best = p;
  for (let p = 0; p < 4; p++) Q[p] = V[4 * p + best]!;
  return K[5 * best]!;
}

/** One Jacobi rotation that clears K[p][q]. */
function rotatePlane(p: number, q: number): void {
  const apq = K[4 * p + q]!;
  if (apq === 0) return;
  const theta = (K[5 * q]! - K[5 * p]!) / (2 * apq);
  const t = (theta >= 0 ? 1 : -1) / (Math.abs(theta) + Math.sqrt(theta * theta + 1));
  const c = 1 / Math.sqrt(t * t + 1);
  const s = t * c;
  for (let k = 0; k < 4; k++) {
    const kp = K[4 * k + p]!;
    const kq = K[4 * k + q]!;
    K[4 * k + p] = c * kp - s * kq;
    K[4 * k + q] = s * kp + c * kq;
  }
  for (let k = 0; k < 4; k++) {
    const pk = K[4 * p + k]!;
    const qk = K[4 * q + k]!;
    K[4 * p + k] = c * pk - s * qk;
    K[4 * q + k] = s * pk + c * qk;
    const vp = V[4 * k + p]!;
    const vq = V[4 * k + q]!;
    V[4 * k + p] = c * vp - s * vq;
    V[4 * k + q] = s * vp + c * vq;
  }
}

/**
 * The proper rotation R, row major, that brings x best onto y (y ~ R x). Where several are equally good (linear sets,
 * one atom) it is one of them.
 *
 * @returns by how much the largest root lies above the second: how firmly M holds the rotation
 */
export function rotationInto(m: Float64Array, at: number, rotation: Float64Array): number {
  const largest = eigenSystem(m, at);
  let second = Number.NEGATIVE_INFINITY;
  let skipped = false;
  for (let p = 0; p < 16; p += 5) {
    if (K[p] === largest && !skipped) skipped = true;
    else if (K[p]! > second) second = K[p]!;
  }
  const w = Q[0]!;
  const x = Q[1]!;
  const y = Q[2]!;
  const z = Q[3]!;
  rotation[0] = w * w + x * x - y * y - z * z;
  rotation[1] = 2 * (x * y - w * z);
  rotation[2] = 2 * (x * z + w * y);
  rotation[3] = 2 * (x * y + w * z);
  rotation[4] = w * w - x * x + y * y - z * z;
  rotation[5] = 2 * (y * z - w * x);
  rotation[6] = 2 * (x * z - w * y);
  rotation[7] = 2 * (y * z + w * x);
  rotation[8] = w * w - x * x - y * y + z * z;
  return largest - second;
}

const M = new Float64Array(9);
const R = new Float64Array(9);

/**
 * RMSD of two centred sets after the best proper rotation.
 *
 * @param ex, ey sums of squares as `centreInto` returned them
 * @param total sum of the weights: the number of atoms without weights
 * @param hand 1, or -1 for the mirror image of y
 * @returns Å; 0 for no atom
 * @example alignedRmsd(x, 0, ex, y, 0, ey, n, null, n, 1)
 */
export function alignedRmsd(
  x: Float64Array,
  xo: number,
  ex: number,
  y: Float64Array,
  yo: number,
  ey: number,
  n: number,
  map: Int32Array | null,
  total: number,
  hand: 1 | -1,
): number {
  if (n === 0) return 0;
  covarianceInto(x, xo, y, yo, n, map, M, 0);
  if (hand < 0) for (let k = 0; k < 9; k++) M[k] = -M[k]!;
  const spread = ex + ey;
  const difference = spread - 2 * largestRoot(M, 0, spread / 2);
  if (difference >= CANCELLATION * spread) return Math.sqrt(difference / total);
  rotationInto(M, 0, R);
  const sum = residual(x, xo, y, yo, n, map, hand);
  return sum <= DOUBLE_ROUNDING * spread ? 0 : Math.sqrt(sum / total);
}

/** Sum of |R x_k - y_map(k)|^2 with the scratch rotation R. */
function residual(
  x: Float64Array,
  xo: number,
  y: Float64Array,
  yo: number,
  n: number,
  map: Int32Array | null,
  hand: 1 | -1,
): number {
  let sum = 0;
  for (let k = 0; k < n; k++) {
    const i = xo + 3 * k;
    const j = yo + 3 * (map ? map[k]! : k);
    const a = x[i]!;
    const b = x[i + 1]!;
    const c = x[i + 2]!;
    const dx = R[0]! * a + R[1]! * b + R[2]! * c - hand * y[j]!;
    const dy = R[3]! * a + R[4]! * b + R[5]! * c - hand * y[j + 1]!;
    const dz = R[6]! * a + R[7]! * b + R[8]! * c - hand * y[j + 2]!;
    sum += dx * dx + dy * dy + dz * dz;
  }
  return sum;
}

// Superposition of one set of points on many, four at a time, in AssemblyScript. Every lane does the operations of
// app/lib/align/kernel.ts (covarianceInto, largestRoot, alignedRmsd) in the same order in 64-bit floats, and IEEE 754
// rounds each of them in one way only: the same bytes come out. What that file treats apart (a nearly double root,
// digits lost near zero) is given back as -1 for it to work out. Keep the two in step; a test compares their bits.

/** Norm, determinant and constant of the quartic of two pairs of sets. */
const QUARTICS: usize = memory.data(96, 16);

function times(a: v128, b: v128): v128 {
  return f64x2.mul(a, b);
}

function plus(a: v128, b: v128): v128 {
  return f64x2.add(a, b);
}

function minus(a: v128, b: v128): v128 {
  return f64x2.sub(a, b);
}

/** Norm, determinant and constant of x against two sets in lanes, 16 bytes each, to `out`. */
function quartic(x: usize, y: usize, n: i32, out: usize): void {
  let m0 = f64x2.splat(0);
  let m1 = m0;
  let m2 = m0;
  let m3 = m0;
  let m4 = m0;
  let m5 = m0;
  let m6 = m0;
  let m7 = m0;
  let m8 = m0;
  for (let k = 0; k < n; k++) {
    const a = v128.load64_splat(x);
    const b = v128.load64_splat(x, 8);
    const c = v128.load64_splat(x, 16);
    const p = v128.load(y);
    const q = v128.load(y, 16);
    const r = v128.load(y, 32);
    m0 = plus(m0, times(a, p));
    m1 = plus(m1, times(a, q));
    m2 = plus(m2, times(a, r));
    m3 = plus(m3, times(b, p));
    m4 = plus(m4, times(b, q));
    m5 = plus(m5, times(b, r));
    m6 = plus(m6, times(c, p));
    m7 = plus(m7, times(c, q));
    m8 = plus(m8, times(c, r));
    x += 24;
    y += 48;
  }
  let norm = plus(times(m0, m0), times(m1, m1));
  norm = plus(norm, times(m2, m2));
  norm = plus(norm, times(m3, m3));
  norm = plus(norm, times(m4, m4));
  norm = plus(norm, times(m5, m5));
  norm = plus(norm, times(m6, m6));
  norm = plus(norm, times(m7, m7));
  norm = plus(norm, times(m8, m8));
  const c0 = minus(times(m4, m8), times(m5, m7));
  const c1 = minus(times(m5, m6), times(m3, m8));
  const c2 = minus(times(m3, m7), times(m4, m6));
  const c3 = minus(times(m2, m7), times(m1, m8));
  const c4 = minus(times(m0, m8), times(m2, m6));
  const c5 = minus(times(m1, m6), times(m0, m7));
  const c6 = minus(times(m1, m5), times(m2, m4));
  const c7 = minus(times(m2, m3), times(m0, m5));
  const c8 = minus(times(m0, m4), times(m1, m3));
  const determinant = plus(plus(times(m0, c0), times(m1, c1)), times(m2, c2));
  let cofactors = plus(times(c0, c0), times(c1, c1));
  cofactors = plus(cofactors, times(c2, c2));
  cofactors = plus(cofactors, times(c3, c3));
  cofactors = plus(cofactors, times(c4, c4));
  cofactors = plus(cofactors, times(c5, c5));
  cofactors = plus(cofactors, times(c6, c6));
  cofactors = plus(cofactors, times(c7, c7));
  cofactors = plus(cofactors, times(c8, c8));
  v128.store(out, norm);
  v128.store(out, determinant, 16);
  v128.store(out, minus(times(norm, norm), times(f64x2.splat(4), cofactors)), 32);
}

/** RMSDs from the last values of Newton's iteration; -1 where the slow path has to decide. */
function settled(norm: v128, root: v128, slope: v128, spread: v128, total: f64): v128 {
  const difference = minus(spread, times(f64x2.splat(2), root));
  const cube = times(times(times(f64x2.splat(1e-2), root), root), root);
  let sound = f64x2.gt(slope, cube);
  sound = v128.and(sound, f64x2.ge(difference, times(f64x2.splat(1e-8), spread)));
  sound = v128.and(sound, f64x2.gt(norm, f64x2.splat(0)));
  const rmsd = f64x2.sqrt(f64x2.div(difference, f64x2.splat(total)));
  return v128.bitselect(rmsd, f64x2.splat(-1), sound);
}

/**
 * RMSDs of a centred set x to `quads` times four others.
 *
 * @param x 3 n doubles; `ex` their sum of squares
 * @param y for each two sets: n times x, x', y, y', z, z'; `ey` their sums of squares
 * @param total number of atoms, or sum of weights
 * @param out RMSDs, in the order of the sets
 */
export function rmsds(
  x: usize,
  ex: f64,
  y: usize,
  ey: usize,
  n: i32,
  quads: i32,
  total: f64,
  out: usize,
): void {
  const stride: usize = <usize>n * 48;
  const zero = f64x2.splat(0);
  const two = f64x2.splat(2);
  const three = f64x2.splat(3);
  const four = f64x2.splat(4);
  const eight = f64x2.splat(8);
  const share = f64x2.splat(1e-15);
  for (let quad = 0; quad < quads; quad++) {
    quartic(x, y, n, QUARTICS);
    quartic(x, y + stride, n, QUARTICS + 48);
    y += 2 * stride;
    const spreadA = plus(f64x2.splat(ex), v128.load(ey));
    const spreadB = plus(f64x2.splat(ex), v128.load(ey, 16));
    ey += 32;
    const normA = v128.load(QUARTICS);
    const normB = v128.load(QUARTICS, 48);
    const detA = times(eight, v128.load(QUARTICS, 16));
    const detB = times(eight, v128.load(QUARTICS, 64));
    const constantA = v128.load(QUARTICS, 32);
    const constantB = v128.load(QUARTICS, 80);
    const twiceA = times(two, normA);
    const twiceB = times(two, normB);
    let rootA = f64x2.min(f64x2.div(spreadA, two), f64x2.sqrt(times(three, normA)));
    let rootB = f64x2.min(f64x2.div(spreadB, two), f64x2.sqrt(times(three, normB)));
    let goesA = i64x2.splat(-1);
    let goesB = i64x2.splat(-1);
    let slopeA = zero;
    let slopeB = zero;
    // Two pairs of lanes in one loop: each waits for its own division, not for the other's.
    for (let step = 0; step < 50; step++) {
      const squareA = times(rootA, rootA);
      const squareB = times(rootB, rootB);
      const riseA = minus(times(times(four, rootA), minus(squareA, normA)), detA);
      const riseB = minus(times(times(four, rootB), minus(squareB, normB)), detB);
      const valueA = plus(minus(times(squareA, minus(squareA, twiceA)), times(detA, rootA)), constantA);
      const valueB = plus(minus(times(squareB, minus(squareB, twiceB)), times(detB, rootB)), constantB);
      slopeA = v128.bitselect(riseA, slopeA, goesA);
      slopeB = v128.bitselect(riseB, slopeB, goesB);
      goesA = v128.and(goesA, f64x2.gt(riseA, zero));
      goesB = v128.and(goesB, f64x2.gt(riseB, zero));
      const changeA = f64x2.div(valueA, riseA);
      const changeB = f64x2.div(valueB, riseB);
      rootA = v128.bitselect(minus(rootA, changeA), rootA, goesA);
      rootB = v128.bitselect(minus(rootB, changeB), rootB, goesB);
      goesA = v128.andnot(goesA, f64x2.le(f64x2.abs(changeA), times(share, rootA)));
      goesB = v128.andnot(goesB, f64x2.le(f64x2.abs(changeB), times(share, rootB)));
      if (!v128.any_true(v128.or(goesA, goesB))) break;
    }
    v128.store(out, settled(normA, rootA, slopeA, spreadA, total));
    v128.store(out, settled(normB, rootB, slopeB, spreadB, total), 16);
    out += 32;
  }
}

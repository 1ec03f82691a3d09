/** Added to the diagonal so that rounding does not make a correlation matrix look indefinite. */
const JITTER = 1e-10;

/**
 * Lower triangle L of a positive definite matrix, L L^T = matrix (+ 1e-10 on the diagonal).
 *
 * @param matrix n x n, row by row
 * @returns L, n x n, row by row, zero above the diagonal; null where the matrix is not positive definite
 * @throws RangeError where the list is not n x n long
 * @example choleskyFactor(Float64Array.of(1, 0.5, 0.5, 1), 2) // about 1, 0, 0.5, 0.866
 */
export function choleskyFactor(matrix: ArrayLike<number>, n: number): Float64Array | null {
  if (matrix.length !== n * n) throw new RangeError(`${matrix.length} entries are no ${n} x ${n} matrix.`);
  const factor = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let rest = matrix[i * n + j]! + (i === j ? JITTER : 0);
      for (let k = 0; k < j; k++) rest -= factor[i * n + k]! * factor[j * n + k]!;
      if (i === j) {
        if (!(rest > 0)) return null;
        factor[i * n + i] = Math.sqrt(rest);
      } else factor[i * n + j] = rest / factor[j * n + j]!;
    }
  }
  return factor;
}

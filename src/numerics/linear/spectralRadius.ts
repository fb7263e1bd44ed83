/** The largest modulus among the eigenvalues of a general matrix, from a general-purpose linear algebra library. */

import { EigenvalueDecomposition, Matrix, solve } from 'ml-matrix';

/**
 * Spectral radius of A⁻¹ B.
 *
 * @param a  shape (k, k), row-major, symmetric positive semi-definite; a ridge of rounding size is added
 * @param b  shape (k, k), row-major
 */
export function spectralRadius(a: Float64Array, b: Float64Array, k: number): number {
  const left = new Matrix(k, k);
  const right = new Matrix(k, k);
  let trace = 0;
  for (let i = 0; i < k; i++) trace += a[i * k + i];
  for (let i = 0; i < k; i++) {
    for (let j = 0; j < k; j++) {
      left.set(i, j, a[i * k + j] + (i === j ? (1e-10 * trace) / k : 0));
      right.set(i, j, b[i * k + j]);
    }
  }
  const { realEigenvalues, imaginaryEigenvalues } = new EigenvalueDecomposition(solve(left, right));
  let most = 0;
  for (let i = 0; i < k; i++) most = Math.max(most, Math.hypot(realEigenvalues[i], imaginaryEigenvalues[i]));
  return most;
}

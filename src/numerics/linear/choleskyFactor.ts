/** Cholesky factors of small symmetric matrices in flat arrays, for loops that factor thousands of them. */

import { innerProduct } from './denseMatrix.js';

/**
 * Writes the lower-triangular L with L Lᵀ = matrix.
 *
 * @param matrix  shape (n, n) row-major, symmetric; the leading n × n part of rows `stride` apart
 * @param lower  shape (n, n), overwritten (zero above the diagonal)
 * @param stride  distance between the rows of `matrix`; default n
 * @returns false where the matrix is not positive definite; `lower` is then of no use
 */
export function factorCholeskyInto(
  matrix: ArrayLike<number>,
  n: number,
  lower: Float64Array,
  stride = n,
): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const sum = matrix[i * stride + j] - innerProduct(lower, i * n, lower, j * n, j);
      if (i !== j) {
        lower[i * n + j] = sum / lower[j * n + j];
      } else {
        if (!(sum > 0)) return false;
        lower[i * n + i] = Math.sqrt(sum);
      }
    }
    for (let j = i + 1; j < n; j++) lower[i * n + j] = 0;
  }
  return true;
}

/** Replaces r by L⁻¹ r, for a lower-triangular L of shape (n, n). */
export function solveLowerInPlace(lower: Float64Array, n: number, right: Float64Array): void {
  for (let i = 0; i < n; i++) {
    let sum = right[i];
    for (let j = 0; j < i; j++) sum -= lower[i * n + j] * right[j];
    right[i] = sum / lower[i * n + i];
  }
}

/** Replaces r by Lᵀ⁻¹ r, for a lower-triangular L of shape (n, n). */
export function solveUpperInPlace(lower: Float64Array, n: number, right: Float64Array): void {
  for (let i = n - 1; i >= 0; i--) {
    let sum = right[i];
    for (let j = i + 1; j < n; j++) sum -= lower[j * n + i] * right[j];
    right[i] = sum / lower[i * n + i];
  }
}

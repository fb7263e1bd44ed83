/**
 * The inverse of a symmetric positive definite matrix by Cholesky factors, for sizes of some hundreds where it is needed
 * again and again: every inner loop runs along rows that lie contiguous in memory.
 *
 * Source  Golub & Van Loan, Matrix Computations (4th ed. 2013), ch. 4.2.
 */

/**
 * @param matrix  shape (n, n) row-major, symmetric; only the lower triangle is read; left untouched
 * @returns shape (n, n), symmetric to the last bit; null where the matrix is not positive definite to rounding
 *
 * Cost  O(n³) time, three arrays of n² numbers.
 */
export function invertPositive(matrix: Float64Array, n: number): Float64Array | null {
  const scales = new Float64Array(n); // unit diagonal first, so that units do not matter to the rounding
  for (let i = 0; i < n; i++) {
    const pivot = matrix[i * n + i];
    if (!(pivot > 0) || pivot === Infinity) return null;
    scales[i] = 1 / Math.sqrt(pivot);
  }
  const lower = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const value = matrix[i * n + j] * scales[i] * scales[j] - dot(lower, i * n, lower, j * n, j);
      if (i !== j) lower[i * n + j] = value / lower[j * n + j];
      else if (value > SINGULAR) lower[i * n + i] = Math.sqrt(value);
      else return null;
    }
  }
  // Row i holds column i of the inverse of the factor, from its diagonal on.
  const columns = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    columns[i * n + i] = 1 / lower[i * n + i];
    for (let k = i + 1; k < n; k++)
      columns[i * n + k] = -dot(lower, k * n + i, columns, i * n + i, k - i) / lower[k * n + k];
  }
  const inverse = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const value = dot(columns, i * n + i, columns, j * n + i, n - i) * (scales[i] * scales[j]);
      inverse[i * n + j] = value;
      inverse[j * n + i] = value;
    }
  }
  return inverse;
}

const SINGULAR = 1e-14; // what is left of a unit pivot when a row is a combination of those above it

/** Inner product of two stretches, four sums at a time. */
function dot(a: Float64Array, aFrom: number, b: Float64Array, bFrom: number, length: number): number {
  let s0 = 0;
  let s1 = 0;
  let s2 = 0;
  let s3 = 0;
  const whole = length - (length % 4);
  for (let i = 0; i < whole; i += 4) {
    s0 += a[aFrom + i] * b[bFrom + i];
    s1 += a[aFrom + i + 1] * b[bFrom + i + 1];
    s2 += a[aFrom + i + 2] * b[bFrom + i + 2];
    s3 += a[aFrom + i + 3] * b[bFrom + i + 3];
  }
  for (let i = whole; i < length; i++) s0 += a[aFrom + i] * b[bFrom + i];
  return s0 + s1 + (s2 + s3);
}

/**
 * The inverse of a symmetric positive definite matrix by Cholesky factors, for sizes up to some thousand where it is
 * needed again and again. Every inner loop runs along rows that lie contiguous in memory, and leaves out the zeros that
 * rows begin with: in a good order of the unknowns, matrices of basis functions that overlap with few others have their
 * entries near the diagonal, and so have their factors.
 *
 * Source  Golub & Van Loan, Matrix Computations (4th ed. 2013), ch. 4.2; envelopes: George & Liu, Computer Solution of
 *         Large Sparse Positive Definite Systems (1981), ch. 4.
 */

/**
 * @param matrix  shape (n, n) row-major, symmetric; only the lower triangle is read; left untouched
 * @param order  length n: which row to take first, second, …; default as they come. The answer depends on it by rounding
 *   alone
 * @returns shape (n, n), symmetric to the last bit; null where the matrix is not positive definite to rounding
 *
 * Cost  O(n² m) time for rows that begin m before the diagonal (O(n³) for full ones), three arrays of n² numbers.
 */
export function invertPositive(matrix: Float64Array, n: number, order?: Int32Array): Float64Array | null {
  const scales = new Float64Array(n); // unit diagonal first, so that units do not matter to the rounding
  for (let i = 0; i < n; i++) {
    const pivot = matrix[i * n + i];
    if (!(pivot > 0) || pivot === Infinity) return null;
    scales[i] = 1 / Math.sqrt(pivot);
  }
  const lower = new Float64Array(n * n);
  const first = new Int32Array(n);
  for (let i = 0; i < n; i++) {
    const row = order ? order[i] : i;
    first[i] = i;
    for (let j = 0; j <= i; j++) {
      const column = order ? order[j] : j;
      const value = matrix[row >= column ? row * n + column : column * n + row];
      if (value === 0) continue;
      if (first[i] > j) first[i] = j;
      lower[i * n + j] = value * scales[row] * scales[column];
    }
  }
  if (!factorInPlace(lower, first, n)) return null;
  const inverse = new Float64Array(n * n);
  const solution = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    solveUnit(lower, first, n, j, solution);
    const column = order ? order[j] : j;
    for (let i = j; i < n; i++) {
      const row = order ? order[i] : i;
      const value = solution[i] * scales[row] * scales[column];
      inverse[row * n + column] = value;
      inverse[column * n + row] = value;
    }
  }
  return inverse;
}

const SINGULAR = 1e-14; // what is left of a unit pivot when a row is a combination of those above it

/** The Cholesky factor in place of the lower triangle; false where a pivot vanishes. */
function factorInPlace(lower: Float64Array, first: Int32Array, n: number): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = first[i]; j <= i; j++) {
      const from = Math.max(first[i], first[j]);
      const value = lower[i * n + j] - dot(lower, i * n + from, lower, j * n + from, j - from);
      if (i !== j) lower[i * n + j] = value / lower[j * n + j];
      else if (value > SINGULAR) lower[i * n + i] = Math.sqrt(value);
      else return false;
    }
  }
  return true;
}

/** Entries j … n − 1 of the column j of the inverse: the rest follows by symmetry. */
function solveUnit(lower: Float64Array, first: Int32Array, n: number, j: number, out: Float64Array): void {
  out[j] = 1 / lower[j * n + j];
  for (let i = j + 1; i < n; i++) {
    const from = Math.max(first[i], j);
    out[i] = -dot(lower, i * n + from, out, from, i - from) / lower[i * n + i];
  }
  for (let i = n - 1; i >= j; i--) {
    const value = out[i] / lower[i * n + i];
    out[i] = value;
    const row = i * n;
    for (let k = Math.max(first[i], j); k < i; k++) out[k] -= lower[row + k] * value;
  }
}

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

/**
 * Cholesky factors of symmetric positive definite matrices of sizes up to some thousand, where they are needed again and
 * again. Every inner loop runs along rows that lie contiguous in memory, and leaves out the zeros that rows begin with: in
 * a good order of the unknowns, matrices of basis functions that overlap with few others have their entries near the
 * diagonal, and so have their factors.
 *
 * Source  Golub & Van Loan, Matrix Computations (4th ed. 2013), ch. 4.2; envelopes: George & Liu, Computer Solution of
 *         Large Sparse Positive Definite Systems (1981), ch. 4; the inverse inside the envelope: Takahashi, Fagan & Chen,
 *         Proc. 8th PICA Conf. (1973) 63; Erisman & Tinney, Commun. ACM 18 (1975) 177.
 */

import { innerProduct } from './denseMatrix.js';

export interface PositiveFactor {
  /** The solution for a right-hand side, length n. */
  solve(right: Float64Array): Float64Array;
  /** The inverse, shape (n, n), symmetric to the last bit. */
  inverse(): Float64Array;
  /** The inverse where the matrix, filled up between the first entry of each row and its diagonal, has entries; zero
   * elsewhere. */
  innerInverse(): Float64Array;
}

/**
 * Factorises.
 *
 * @param matrix  shape (n, n) row-major, symmetric; only the lower triangle is read; left untouched
 * @param order  length n: which row to take first, second, …; default as they come. Answers depend on it by rounding
 *   alone
 * @returns null where the matrix is not positive definite to rounding
 *
 * Cost  for rows that begin m before the diagonal O(n m²) time, the inverse O(n² m); O(n³) for full rows.
 */
export function factorPositive(matrix: Float64Array, n: number, order?: Int32Array): PositiveFactor | null {
  const scales = new Float64Array(n); // unit diagonal first, so that units do not matter to the rounding
  for (let i = 0; i < n; i++) {
    const pivot = matrix[i * n + i];
    if (!(pivot > 0) || pivot === Infinity) return null;
    scales[i] = 1 / Math.sqrt(pivot);
  }
  const rows = order ?? Int32Array.from({ length: n }, (_, i) => i);
  const lower = new Float64Array(n * n);
  const first = new Int32Array(n);
  for (let i = 0; i < n; i++) {
    const row = rows[i];
    first[i] = i;
    for (let j = 0; j <= i; j++) {
      const column = rows[j];
      const value = matrix[row >= column ? row * n + column : column * n + row];
      if (value === 0) continue;
      if (first[i] > j) first[i] = j;
      lower[i * n + j] = value * scales[row] * scales[column];
    }
  }
  if (!factorInPlace(lower, first, n)) return null;
  const solution = new Float64Array(n);
  return {
    solve(right) {
      for (let i = 0; i < n; i++) solution[i] = right[rows[i]] * scales[rows[i]];
      solveFrom(lower, first, n, 0, solution);
      const out = new Float64Array(n);
      for (let i = 0; i < n; i++) out[rows[i]] = solution[i] * scales[rows[i]];
      return out;
    },
    inverse() {
      const out = new Float64Array(n * n);
      for (let j = 0; j < n; j++) {
        // Entries before j follow by symmetry.
        solution.fill(0);
        solution[j] = 1;
        solveFrom(lower, first, n, j, solution);
        for (let i = j; i < n; i++) {
          const value = solution[i] * scales[rows[i]] * scales[rows[j]];
          out[rows[i] * n + rows[j]] = value;
          out[rows[j] * n + rows[i]] = value;
        }
      }
      return out;
    },
    innerInverse() {
      const inner = invertInside(lower, first, n);
      const out = new Float64Array(n * n);
      for (let i = 0; i < n; i++) {
        for (let j = first[i]; j <= i; j++) {
          const value = inner[i * n + j] * scales[rows[i]] * scales[rows[j]];
          out[rows[i] * n + rows[j]] = value;
          out[rows[j] * n + rows[i]] = value;
        }
      }
      return out;
    },
  };
}

const SINGULAR = 1e-14; // what is left of a unit pivot when a row is a combination of those above it

/** The Cholesky factor in place of the lower triangle; false where a pivot vanishes. */
function factorInPlace(lower: Float64Array, first: Int32Array, n: number): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = first[i]; j <= i; j++) {
      const from = Math.max(first[i], first[j]);
      const value = lower[i * n + j] - innerProduct(lower, i * n + from, lower, j * n + from, j - from);
      if (i !== j) lower[i * n + j] = value / lower[j * n + j];
      else if (value > SINGULAR) lower[i * n + i] = Math.sqrt(value);
      else return false;
    }
  }
  return true;
}

/** Solves in place from row `start` on: the entries before it are zero on the right and not wanted. */
function solveFrom(
  lower: Float64Array,
  first: Int32Array,
  n: number,
  start: number,
  out: Float64Array,
): void {
  for (let i = start; i < n; i++) {
    const from = Math.max(first[i], start);
    out[i] = (out[i] - innerProduct(lower, i * n + from, out, from, i - from)) / lower[i * n + i];
  }
  for (let i = n - 1; i >= start; i--) {
    const value = out[i] / lower[i * n + i];
    out[i] = value;
    const row = i * n;
    for (let k = Math.max(first[i], start); k < i; k++) out[k] -= lower[row + k] * value;
  }
}

/** The inverse inside the envelope, shape (n, n), both triangles, from the last column to the first. */
function invertInside(lower: Float64Array, first: Int32Array, n: number): Float64Array {
  const inner = new Float64Array(n * n);
  const below = new Int32Array(n);
  const weights = new Float64Array(n);
  for (let j = n - 1; j >= 0; j--) {
    const pivot = lower[j * n + j];
    let count = 0;
    for (let k = j + 1; k < n; k++) {
      if (first[k] > j) continue;
      below[count] = k;
      weights[count++] = lower[k * n + j] / pivot;
    }
    let own = 1 / (pivot * pivot);
    for (let a = 0; a < count; a++) {
      const row = below[a] * n;
      let sum = 0;
      for (let b = 0; b < count; b++) sum += weights[b] * inner[row + below[b]];
      inner[row + j] = -sum;
      inner[j * n + below[a]] = -sum;
      own += weights[a] * sum;
    }
    inner[j * n + j] = own;
  }
  return inner;
}

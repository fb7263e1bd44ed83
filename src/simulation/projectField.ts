/** A function of place, given by its values at many places, as a coefficient field. */

import type { BasisSpec } from '../fields/Basis.js';
import { createBasis } from '../fields/createBasis.js';
import { NumericalError } from '../errors.js';

export interface Projection {
  /** Basis coefficients of least squared error for values at the projection's places. */
  project(values: Float64Array): number[];
  /** Root mean square of what a projection of values misses, in the unit of the values. */
  missed(values: Float64Array, coefficients: readonly number[]): number;
}

const RIDGE = 1e-10; // of the mean diagonal: places on a full grid determine every function

/**
 * Least squares onto a basis with the places given; the matrix of the normal equations is factored once.
 *
 * @param places  shape (m, d), enough of them to determine every function
 * @throws NumericalError  where they are not
 *
 * Cost  O(k³ + m s²) once, O(m s + k²) per projection, s the support of the basis.
 */
export function createProjection(spec: BasisSpec, places: Float64Array, d: number): Projection {
  const basis = createBasis(spec, d);
  const k = basis.functionCount;
  const m = places.length / d;
  const { support } = basis;
  const indices = new Int32Array(m * support);
  const parts = new Float64Array(m * support);
  const counts = new Int32Array(m);
  const factor = new Float64Array(k * k);
  const foundIndices = new Int32Array(support);
  const foundParts = new Float64Array(support);
  for (let row = 0; row < m; row++) {
    const count = basis.evaluateInto(places, row * d, foundIndices, foundParts);
    counts[row] = count;
    indices.set(foundIndices, row * support);
    parts.set(foundParts, row * support);
    for (let a = 0; a < count; a++) {
      for (let b = 0; b < count; b++)
        factor[foundIndices[a] * k + foundIndices[b]] += foundParts[a] * foundParts[b];
    }
  }
  factorInPlace(factor, k);

  const project: Projection['project'] = (values) => {
    const x = new Float64Array(k);
    for (let row = 0; row < m; row++) {
      for (let a = 0; a < counts[row]; a++)
        x[indices[row * support + a]] += parts[row * support + a] * values[row];
    }
    for (let i = 0; i < k; i++) {
      for (let j = 0; j < i; j++) x[i] -= factor[i * k + j] * x[j];
      x[i] /= factor[i * k + i];
    }
    for (let i = k - 1; i >= 0; i--) {
      for (let j = i + 1; j < k; j++) x[i] -= factor[j * k + i] * x[j];
      x[i] /= factor[i * k + i];
    }
    return Array.from(x);
  };
  const missed: Projection['missed'] = (values, coefficients) => {
    let square = 0;
    for (let row = 0; row < m; row++) {
      let rest = values[row];
      for (let a = 0; a < counts[row]; a++)
        rest -= parts[row * support + a] * coefficients[indices[row * support + a]];
      square += rest * rest;
    }
    return Math.sqrt(square / m);
  };
  return { project, missed };
}

/** Lower Cholesky factor in the lower triangle. */
function factorInPlace(matrix: Float64Array, k: number): void {
  let trace = 0;
  for (let i = 0; i < k; i++) trace += matrix[i * k + i];
  for (let i = 0; i < k; i++) matrix[i * k + i] += (RIDGE * trace) / k;
  for (let j = 0; j < k; j++) {
    for (let i = j; i < k; i++) {
      let sum = matrix[i * k + j];
      for (let l = 0; l < j; l++) sum -= matrix[i * k + l] * matrix[j * k + l];
      if (i > j) matrix[i * k + j] = sum / matrix[j * k + j];
      else if (sum > 0) matrix[i * k + i] = Math.sqrt(sum);
      else
        throw new NumericalError(`a basis of ${k} functions is not determined by its places`, {
          functions: k,
        });
    }
  }
}

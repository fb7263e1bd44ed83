/**
 * Dense matrices of one to three rows, row-major, for the inner loops of the integrators: no allocation, no pivoting.
 */

import { symmetricEigenInto } from '../numerics/linear/smallMatrix.js';
import type { FieldName } from '../fields/CoefficientField.js';

/**
 * Writes the full d × d matrix of the components of a matrix form: all d² for friction, the upper triangle of
 * noise and diffusion.
 */
export function fillMatrix(
  name: FieldName,
  components: ArrayLike<number>,
  offset: number,
  d: number,
  out: Float64Array,
): void {
  if (name === 'friction') {
    for (let i = 0; i < d * d; i++) out[i] = components[offset + i];
    return;
  }
  let next = offset;
  for (let i = 0; i < d; i++) {
    for (let j = i; j < d; j++) {
      out[i * d + j] = components[next];
      out[j * d + i] = components[next];
      next++;
    }
  }
}

/** Smallest eigenvalue of the symmetric part. */
export function smallestSymmetricEigenvalue(matrix: Float64Array, d: number): number {
  const values = new Float64Array(d);
  eigenSymmetricInto(matrix, d, values, new Float64Array(d * d));
  return Math.min(...values);
}

const work = new Float64Array(9);
const symmetric = new Float64Array(9);

/** Eigenvalues and eigenvectors (columns) of the symmetric part of a matrix. */
function eigenSymmetricInto(
  matrix: Float64Array,
  d: number,
  values: Float64Array,
  vectors: Float64Array,
): void {
  for (let i = 0; i < d; i++) {
    for (let j = 0; j < d; j++) symmetric[i * d + j] = 0.5 * (matrix[i * d + j] + matrix[j * d + i]);
  }
  symmetricEigenInto(symmetric, d, values, vectors, work);
}

const eigenvalues = new Float64Array(3);
const eigenvectors = new Float64Array(9);

/**
 * Replaces the symmetric part of a matrix by the nearest one without negative eigenvalues (Higham 1988); the
 * antisymmetric part stays.
 *
 * @returns whether anything had to be changed
 */
export function clampToPositive(matrix: Float64Array, d: number): boolean {
  if (isClearlyPositive(matrix, d)) return false;
  eigenSymmetricInto(matrix, d, eigenvalues, eigenvectors);
  let negative = false;
  for (let i = 0; i < d; i++) negative ||= eigenvalues[i] < 0;
  if (!negative) return false;
  for (let i = 0; i < d; i++) {
    for (let j = i; j < d; j++) {
      let sum = 0;
      for (let k = 0; k < d; k++) {
        if (eigenvalues[k] > 0) sum += eigenvectors[i * d + k] * eigenvalues[k] * eigenvectors[j * d + k];
      }
      const rotation = 0.5 * (matrix[i * d + j] - matrix[j * d + i]);
      matrix[i * d + j] = sum + rotation;
      matrix[j * d + i] = sum - rotation;
    }
  }
  return true;
}

/** Strict diagonal dominance with a positive diagonal (Gershgorin 1931): the cheap common case. */
function isClearlyPositive(matrix: Float64Array, d: number): boolean {
  for (let i = 0; i < d; i++) {
    let rest = 0;
    for (let j = 0; j < d; j++) {
      if (j !== i) rest += 0.5 * Math.abs(matrix[i * d + j] + matrix[j * d + i]);
    }
    if (!(matrix[i * d + i] > rest)) return false;
  }
  return true;
}

/** The exponential of a matrix's symmetric part plus its antisymmetric part, in place: the `log-matrix` link. */
export function exponentiateSymmetricPart(matrix: Float64Array, d: number): void {
  applyToSymmetricPart(matrix, d, Math.exp);
}

/** The way back from `exponentiateSymmetricPart`; the symmetric part must be positive definite. */
export function takeLogarithmOfSymmetricPart(matrix: Float64Array, d: number): void {
  applyToSymmetricPart(matrix, d, Math.log);
}

function applyToSymmetricPart(matrix: Float64Array, d: number, f: (eigenvalue: number) => number): void {
  eigenSymmetricInto(matrix, d, eigenvalues, eigenvectors);
  for (let i = 0; i < d; i++) {
    for (let j = i; j < d; j++) {
      let sum = 0;
      for (let k = 0; k < d; k++)
        sum += eigenvectors[i * d + k] * f(eigenvalues[k]) * eigenvectors[j * d + k];
      const rotation = 0.5 * (matrix[i * d + j] - matrix[j * d + i]);
      matrix[i * d + j] = sum + rotation;
      matrix[j * d + i] = sum - rotation;
    }
  }
}

/**
 * Lower Cholesky factor of a symmetric positive semi-definite matrix; columns without weight are zero.
 */
export function choleskyInto(matrix: Float64Array, d: number, lower: Float64Array): void {
  for (let j = 0; j < d; j++) {
    let pivot = matrix[j * d + j];
    for (let k = 0; k < j; k++) pivot -= lower[j * d + k] * lower[j * d + k];
    const root = pivot > 1e-14 * matrix[j * d + j] ? Math.sqrt(pivot) : 0;
    for (let i = 0; i < j; i++) lower[i * d + j] = 0;
    lower[j * d + j] = root;
    for (let i = j + 1; i < d; i++) {
      let sum = matrix[i * d + j];
      for (let k = 0; k < j; k++) sum -= lower[i * d + k] * lower[j * d + k];
      lower[i * d + j] = root > 0 ? sum / root : 0;
    }
  }
}

/** Spectral norm of the antisymmetric part of a matrix of one to three rows. */
export function rotationNorm(matrix: Float64Array, d: number): number {
  let square = 0;
  for (let i = 0; i < d; i++) {
    for (let j = i + 1; j < d; j++) square += (0.5 * (matrix[i * d + j] - matrix[j * d + i])) ** 2;
  }
  return Math.sqrt(square);
}

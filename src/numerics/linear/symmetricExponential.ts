/**
 * The exponential of a symmetric d × d matrix and its derivative, both from one spectral decomposition.
 *
 * Source  derivative of a matrix function in the eigenbasis: Daleckii & Krein, Am. Math. Soc. Transl. 47 (1965) 1;
 *         Higham, Functions of Matrices (2008), ch. 3.
 */

import { symmetricEigenInto } from './smallMatrix.js';

export interface SymmetricExponential {
  /** Decomposes a symmetric matrix (shape (d, d)) and writes its exponential. */
  decompose(matrix: Float64Array, values: Float64Array, vectors: Float64Array, out: Float64Array): void;
  /**
   * Writes the derivative of the exponential in a symmetric direction. As a linear map of the direction it is its own
   * transpose, so the same call carries slopes along the exponential back to slopes along the matrix.
   */
  differentiate(
    values: Float64Array,
    vectors: Float64Array,
    direction: Float64Array,
    out: Float64Array,
  ): void;
}

export function createSymmetricExponential(d: number): SymmetricExponential {
  const work = new Float64Array(d * d);
  const inner = new Float64Array(d * d);
  return {
    decompose(matrix, values, vectors, out) {
      symmetricEigenInto(matrix, d, values, vectors, work);
      for (let i = 0; i < d; i++) {
        for (let j = i; j < d; j++) {
          let sum = 0;
          for (let l = 0; l < d; l++) sum += vectors[i * d + l] * Math.exp(values[l]) * vectors[j * d + l];
          out[i * d + j] = sum;
          out[j * d + i] = sum;
        }
      }
    },
    differentiate(values, vectors, direction, out) {
      // Into the eigenbasis, weighted by the divided differences, and back.
      for (let i = 0; i < d; i++) {
        for (let b = 0; b < d; b++) {
          let sum = 0;
          for (let j = 0; j < d; j++) sum += direction[i * d + j] * vectors[j * d + b];
          work[i * d + b] = sum;
        }
      }
      for (let a = 0; a < d; a++) {
        for (let b = 0; b < d; b++) {
          let sum = 0;
          for (let i = 0; i < d; i++) sum += vectors[i * d + a] * work[i * d + b];
          inner[a * d + b] = sum * dividedDifference(values[a], values[b]);
        }
      }
      for (let i = 0; i < d; i++) {
        for (let b = 0; b < d; b++) {
          let sum = 0;
          for (let a = 0; a < d; a++) sum += vectors[i * d + a] * inner[a * d + b];
          work[i * d + b] = sum;
        }
      }
      for (let i = 0; i < d; i++) {
        for (let j = 0; j < d; j++) {
          let sum = 0;
          for (let b = 0; b < d; b++) sum += work[i * d + b] * vectors[j * d + b];
          out[i * d + j] = sum;
        }
      }
    },
  };
}

/** (eᵃ − eᵇ)/(a − b). */
function dividedDifference(a: number, b: number): number {
  const half = (a - b) / 2;
  const ratio = Math.abs(half) < 1e-4 ? 1 + (half * half) / 6 : Math.sinh(half) / half;
  return Math.exp((a + b) / 2) * ratio;
}

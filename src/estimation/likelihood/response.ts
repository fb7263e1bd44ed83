/**
 * How the estimate answers to the score: R = (J + S)⁻¹ with the sensitivity J of the score in place of the information I
 * summed over places. With V = (I + S)⁻¹ = C Cᵀ it is C (1 + Cᵀ(J − I)C)⁻¹ Cᵀ. Measured from one recording J is itself
 * uncertain, most of all where few positions are; the eigenvalues of the middle are therefore kept within limits.
 */

import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import { factorCholeskyInto } from '../../numerics/linear/choleskyFactor.js';
import { multiply, transpose } from '../../numerics/linear/denseMatrix.js';
import type { ScoringSolution } from './scoring.js';

const WEAKEST = 0.1;
const STRONGEST = 2;

/**
 * @param sensitivity  J, shape (p, p), symmetric
 * @returns shape (p, p), symmetric
 */
export function respondTo(
  sensitivity: Float64Array,
  { inverse, information, parameters }: ScoringSolution,
): Float64Array {
  const p = parameters.length;
  const factor = new Float64Array(p * p);
  if (!factorCholeskyInto(inverse, p, factor)) return inverse;
  const across = transpose(factor, p, p);
  const excess = sensitivity.map((value, i) => value - information[i]);
  const relative = multiply(across, multiply(excess, factor, p, p, p), p, p, p);
  if (!relative.every(Number.isFinite)) return inverse;
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(
    Matrix.from1DArray(p, p, relative),
    { assumeSymmetric: true },
  );
  const directions = multiply(factor, Float64Array.from(eigenvectorMatrix.to1DArray()), p, p, p);
  const scaled = directions.map(
    (value, i) => value / Math.min(Math.max(1 + realEigenvalues[i % p], WEAKEST), STRONGEST),
  );
  return multiply(scaled, transpose(directions, p, p), p, p, p);
}

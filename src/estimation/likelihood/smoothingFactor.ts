/**
 * What penalties leave unknown, as a factor that turns standard normals into errors of the parameters.
 *
 * Smoothing bias, as a random effect: (I + S)⁻¹ S^{1/2}. And the strengths themselves, which the data only tell to within
 * some factor: a change of log λ_g moves the parameters by −(I + S)⁻¹ λ_g P_g θ, and about its maximum the logarithm of
 * the marginal likelihood falls off with half the number of directions that strength leaves free.
 *
 * Source  bias as a random effect: Nychka, J. Am. Stat. Assoc. 83 (1988) 1134; uncertain strengths: Wood, Pya & Säfken, J.
 *         Am. Stat. Assoc. 111 (2016) 1548.
 */

import { EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { Estimate } from '../Estimate.js';
import type { RankedPenalty, ScoringSolution } from './scoring.js';

/** The directions of coefficients that a penalty acts on: eigenvalues, and unit eigenvectors of length k. */
export interface PenaltySpectrum {
  readonly values: readonly number[];
  readonly vectors: readonly Float64Array[];
}

/** A penalty with the directions it acts on. */
export interface SpectralPenalty extends RankedPenalty {
  readonly spectrum: PenaltySpectrum;
}

const WIDEST = 2; // standard deviation of log λ: strengths hardly known at all hardly matter

/** @param roughness  shape (k, k) */
export function decomposePenalty(roughness: Float64Array, k: number): PenaltySpectrum {
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(
    Matrix.from1DArray(k, k, roughness),
    { assumeSymmetric: true },
  );
  const largest = Math.max(...realEigenvalues);
  const acting = realEigenvalues.flatMap((value, e) => (value > 1e-9 * largest ? [e] : []));
  return {
    values: acting.map((e) => realEigenvalues[e]),
    vectors: acting.map((e) => Float64Array.from(eigenvectorMatrix.getColumn(e))),
  };
}

/**
 * The factor, shape (p, columns); null where nothing is penalised with a strength from the data.
 *
 * @param inverse  shape (p, p), symmetric: (I + S)⁻¹ or better
 */
export function factorOfSmoothing(
  { strengths, parameters }: ScoringSolution,
  groups: readonly SpectralPenalty[],
  inverse: Float64Array,
): Estimate['smoothingFactor'] {
  const p = parameters.length;
  const columns: Float64Array[] = [];
  groups.forEach((group, g) => {
    if (group.fixedStrength !== undefined) return; // no bias is accounted for
    const { offsets, functionCount: k, spectrum } = group;
    for (const offset of offsets) {
      spectrum.vectors.forEach((vector, e) => {
        const size = Math.sqrt(strengths[g] * spectrum.values[e]);
        columns.push(multiplyPart(inverse, p, offset, vector).map((value) => size * value));
      });
    }
    columns.push(shiftByStrength(inverse, parameters, group, strengths[g], k));
  });
  if (columns.length === 0) return null;
  const values = new Float64Array(p * columns.length);
  columns.forEach((column, c) => {
    for (let i = 0; i < p; i++) values[i * columns.length + c] = column[i];
  });
  return { values, columns: columns.length };
}

/** The parameters' move when log λ is off by one standard deviation. */
function shiftByStrength(
  inverse: Float64Array,
  parameters: Float64Array,
  { offsets, roughness, rank }: SpectralPenalty,
  strength: number,
  k: number,
): Float64Array {
  const p = parameters.length;
  const shift = new Float64Array(p);
  let trace = 0;
  for (const offset of offsets) {
    const pulled = new Float64Array(k);
    for (let i = 0; i < k; i++) {
      for (let j = 0; j < k; j++) {
        const weight = roughness[i * k + j];
        if (weight === 0) continue;
        pulled[i] += weight * parameters[offset + j];
        trace += weight * inverse[(offset + i) * p + offset + j];
      }
    }
    const moved = multiplyPart(inverse, p, offset, pulled);
    for (let i = 0; i < p; i++) shift[i] += strength * moved[i];
  }
  const free = Math.max(rank * offsets.length - strength * trace, 0);
  const deviation = Math.min(WIDEST, Math.sqrt(2 / Math.max(free, 1e-300)));
  return shift.map((value) => deviation * value);
}

/** Columns `offset`, `offset` + 1, … of a symmetric matrix of size p, weighted and summed. */
function multiplyPart(matrix: Float64Array, p: number, offset: number, weights: Float64Array): Float64Array {
  const out = new Float64Array(p);
  for (let i = 0; i < p; i++) {
    let sum = 0;
    for (let j = 0; j < weights.length; j++) sum += matrix[i * p + offset + j] * weights[j];
    out[i] = sum;
  }
  return out;
}

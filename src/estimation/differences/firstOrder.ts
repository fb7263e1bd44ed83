/**
 * First order by differences: drift by lagged instruments, diffusion by the covariance-based estimator applied to the
 * residuals. Free of localization error and motion blur by construction.
 *
 *   (y_{k+1} − y_k)/Δ = μ_e(q_k) + e_k,    instruments built from y_{k−1}
 *
 * The e_k are correlated up to lag 1, so D_e(q) = (Δ/2) Σ_{|j|≤1} E[e_k e_{k+j}]. `correctInterval` turns the effective
 * μ_e and D_e into drift (Itô) and diffusion.
 *
 * Source  Vestergaard, Blainey & Flyvbjerg, Optimal estimation of diffusion coefficients from single-particle
 *         trajectories, Phys. Rev. E 89 (2014) 022726 (covariance-based estimator; here on residuals and by place).
 */

import { DataError } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import { createBasis } from '../../fields/createBasis.js';
import { findRuns, longestRun } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import type { MomentBlocks } from '../penalizedMoments.js';
import { type NoiseMoments, noisePairs } from './residuals.js';
import {
  addBasisRow,
  addOuterProducts,
  addSensitivity,
  createOwnSlopes,
  RecentBasis,
  SparseRow,
} from './sparseRows.js';

/** The drift basis, or null where the drift is taken as zero. */
export function driftBasis(plan: EstimationPlan, dimensions: number): Basis | null {
  return plan.force.basis && createBasis(plan.force.basis, dimensions);
}

/**
 * Moment conditions of the drift, block by block; parameters per axis.
 *
 * @throws DataError  where no run has the three gap-free positions one row needs
 */
export function collectDriftMoments(tracks: TrackSet, plan: EstimationPlan, basis: Basis): MomentBlocks {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const k = basis.functionCount;
  const p = dimensions * k;
  const { count, ofPosition } = plan.blocks;
  const matrices = Array.from({ length: count }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: count }, () => new Float64Array(p));
  const instrumentGram = new Float64Array(p * p);
  const recent = new RecentBasis(basis);
  const regressors = new SparseRow(basis.support);
  const instruments = new SparseRow(basis.support);
  const runs = findRuns(tracks);
  let rows = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    const start = runs.starts[run];
    const end = runs.ends[run];
    if (end - start < 3) continue;
    recent.evaluate(positions, start, dimensions);
    for (let row = start + 1; row < end - 1; row++) {
      recent.evaluate(positions, row, dimensions);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        regressors.clear();
        instruments.clear();
        regressors.append(axis * k, recent, row, 1);
        instruments.append(axis * k, recent, row - 1, 1);
        const block = ofPosition[row];
        const velocity = (positions[at + dimensions] - positions[at]) / dt;
        addOuterProducts(
          matrices[block],
          vectors[block],
          instrumentGram,
          p,
          instruments,
          regressors,
          velocity,
        );
      }
      rows++;
    }
  }
  if (rows === 0) throw tooShort();
  return { size: p, matrices, vectors, instrumentGram };
}

export interface DiffusionMoments extends NoiseMoments {
  /** Shape (B, d): −Σ e_k e_{k+1} Δ² and Σ ρ_{k+1} with ρ = 1 + μ_e′Δ; their ratio is the localization variance. */
  readonly errorSums: Float64Array;
  readonly errorWeights: Float64Array;
}

/**
 * Moment conditions of the effective diffusion, block by block.
 *
 * @param drift  basis of the drift, or null
 * @param parameters  drift parameters, length p₁ (empty without a drift)
 */
export function collectDiffusionMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  drift: Basis | null,
  basis: Basis,
  parameters: Float64Array,
): DiffusionMoments {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const { count: blockCount, ofPosition } = plan.blocks;
  const k = basis.functionCount;
  const pairs = noisePairs(plan.noise.form, dimensions);
  const p = pairs.length * k;
  const matrices = Array.from({ length: blockCount }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: blockCount }, () => new Float64Array(p));
  const total = new Float64Array(p * p);
  const driftSize = drift?.functionCount ?? 0;
  const sensitivity = new Float64Array(p * parameters.length);
  const sums = new Float64Array(blockCount * dimensions);
  const weights = new Float64Array(blockCount * dimensions);
  const slopeAt = createOwnSlopes(drift, parameters, positions, dimensions);
  const recent = new RecentBasis(drift);
  const driftRow = new SparseRow(drift?.support ?? 0);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const runs = findRuns(tracks);
  const residuals = new Float64Array(longestRun(runs) * dimensions);
  const windows = new Float64Array(dimensions);
  let rows = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    const start = runs.starts[run];
    const end = runs.ends[run];
    if (end - start < 4) continue;
    for (let row = start; row < end - 1; row++) {
      recent.evaluate(positions, row, dimensions);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        driftRow.clear();
        driftRow.append(axis * driftSize, recent, row, 1);
        let fitted = 0;
        for (let i = 0; i < driftRow.length; i++)
          fitted += driftRow.values[i] * parameters[driftRow.indices[i]];
        residuals[(row - start) * dimensions + axis] =
          (positions[at + dimensions] - positions[at]) / dt - fitted;
      }
    }
    for (let row = start + 1; row < end - 2; row++) {
      const local = (row - start) * dimensions;
      const block = ofPosition[row];
      const found = basis.evaluateInto(positions, row * dimensions, indices, values);
      recent.evaluate(positions, row, dimensions);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = local + axis;
        windows[axis] = residuals[at - dimensions] + residuals[at] + residuals[at + dimensions];
        sums[block * dimensions + axis] -= residuals[at] * residuals[at + dimensions] * dt * dt;
        weights[block * dimensions + axis] += 1 + slopeAt(row + 1, axis) * dt;
      }
      for (let component = 0; component < pairs.length; component++) {
        let response = 0;
        for (const [a, b] of pairs[component]) {
          response += (residuals[local + a] * windows[b] + residuals[local + b] * windows[a]) / 2;
        }
        response *= dt / (2 * pairs[component].length);
        addBasisRow(
          matrices[block],
          vectors[block],
          total,
          p,
          component * k,
          indices,
          values,
          found,
          response,
        );
        if (!drift) continue;
        for (const [a, b] of pairs[component]) {
          for (const [axis, other] of a === b
            ? [[a, b]]
            : [
                [a, b],
                [b, a],
              ]) {
            driftRow.clear();
            driftRow.append(axis * driftSize, recent, row, 1);
            const weight = ((a === b ? -1 : -0.5) * windows[other] * dt) / pairs[component].length;
            addSensitivity(
              sensitivity,
              parameters.length,
              component * k,
              indices,
              values,
              found,
              driftRow,
              weight,
            );
          }
        }
      }
      rows++;
    }
  }
  if (rows === 0) throw tooShort();
  return {
    size: p,
    matrices,
    vectors,
    instrumentGram: total,
    sensitivity,
    errorSums: sums,
    errorWeights: weights,
  };
}

function tooShort(): DataError {
  return new DataError(
    'no stretch of 4 gap-free positions at one interval was found, which the differences estimator needs at first order; record longer tracks or take --estimator likelihood',
    { needed: 4 },
  );
}

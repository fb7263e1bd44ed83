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
import { noisePairs, ResidualProducts } from './residualProducts.js';
import type { NoiseMoments } from './noiseSums.js';
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
  const { positions, dimensions } = tracks;
  const k = basis.functionCount;
  const p = dimensions * k;
  const { count, ofPosition } = plan.blocks;
  const matrices = Array.from({ length: count }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: count }, () => new Float64Array(p));
  const instrumentGram = new Float64Array(p * p);
  const recent = new RecentBasis(basis);
  const regressors = new SparseRow(basis.support);
  const instruments = new SparseRow(basis.support);
  const rows = visitDriftRows(tracks, (row, velocity, fresh) => {
    for (let other = fresh ? row - 1 : row; other <= row; other++)
      recent.evaluate(positions, other, dimensions);
    const block = ofPosition[row];
    for (let axis = 0; axis < dimensions; axis++) {
      regressors.clear();
      instruments.clear();
      regressors.append(axis * k, recent, row, 1);
      instruments.append(axis * k, recent, row - 1, 1);
      addOuterProducts(
        matrices[block],
        vectors[block],
        instrumentGram,
        p,
        instruments,
        regressors,
        velocity[axis],
      );
    }
  });
  if (rows === 0) throw tooShort();
  return { size: p, matrices, vectors, instrumentGram };
}

/**
 * Visits the rows of the drift regression, run after run: those with a neighbour before and after.
 *
 * @param visit  gets the row, the velocity (y_{k+1} − y_k)/Δ of each axis, and whether the row is the first of its run
 * @returns how many rows there were
 */
export function visitDriftRows(
  tracks: TrackSet,
  visit: (row: number, velocity: Float64Array, fresh: boolean) => void,
): number {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const velocity = new Float64Array(dimensions);
  const runs = findRuns(tracks);
  let rows = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    const first = runs.starts[run] + 1;
    for (let row = first; row < runs.ends[run] - 1; row++) {
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        velocity[axis] = (positions[at + dimensions] - positions[at]) / dt;
      }
      visit(row, velocity, row === first);
      rows++;
    }
  }
  return rows;
}

/** What the localization variance is read from, per block and axis. */
export interface ErrorSums {
  /** Shape (B, d): −Σ e_k e_{k+1} Δ² and Σ ρ_{k+1} with ρ = 1 + μ_e′Δ; their ratio is the localization variance. */
  readonly errorSums: Float64Array;
  readonly errorWeights: Float64Array;
}

export interface DiffusionMoments extends NoiseMoments, ErrorSums {}

/** Sums that a visitor of the diffusion rows fills by `add`. */
export function createErrorSums(
  tracks: TrackSet,
  plan: EstimationPlan,
  drift: Basis | null,
  parameters: Float64Array,
): ErrorSums & { add(row: number, neighbours: Float64Array): void } {
  const { positions, dimensions: d, samplingInterval: dt } = tracks;
  const { count, ofPosition } = plan.blocks;
  const errorSums = new Float64Array(count * d);
  const errorWeights = new Float64Array(count * d);
  const slopeAt = createOwnSlopes(drift, parameters, positions, d);
  return {
    errorSums,
    errorWeights,
    add(row, neighbours) {
      for (let axis = 0; axis < d; axis++) {
        const slot = ofPosition[row] * d + axis;
        errorSums[slot] -= neighbours[axis] * dt * dt;
        errorWeights[slot] += 1 + slopeAt(row + 1, axis) * dt;
      }
    },
  };
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
  const { positions, dimensions } = tracks;
  const { count: blockCount, ofPosition } = plan.blocks;
  const k = basis.functionCount;
  const components = noisePairs(plan.noise.form, dimensions).length;
  const p = components * k;
  const matrices = Array.from({ length: blockCount }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: blockCount }, () => new Float64Array(p));
  const total = new Float64Array(p * p);
  const sensitivity = new Float64Array(p * parameters.length);
  const errors = createErrorSums(tracks, plan, drift, parameters);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  visitDiffusionRows(tracks, plan.noise.form, drift, parameters, (row, products, neighbours, driftRowOf) => {
    const block = ofPosition[row];
    const found = basis.evaluateInto(positions, row * dimensions, indices, values);
    errors.add(row, neighbours);
    for (let component = 0; component < components; component++) {
      addBasisRow(
        matrices[block],
        vectors[block],
        total,
        p,
        component * k,
        indices,
        values,
        found,
        products.responses[component],
      );
      for (let axis = 0; drift && axis < dimensions; axis++) {
        const slope = products.slopes[component * dimensions + axis];
        if (slope === 0) continue;
        addSensitivity(
          sensitivity,
          parameters.length,
          component * k,
          indices,
          values,
          found,
          driftRowOf(axis),
          -slope,
        );
      }
    }
  });
  return {
    size: p,
    matrices,
    vectors,
    instrumentGram: total,
    sensitivity,
    errorSums: errors.errorSums,
    errorWeights: errors.errorWeights,
  };
}

/**
 * What is done with one row of the diffusion regression.
 *
 * @param products  with the responses (Δ/2) Σ_{|j|≤1} e_k e_{k+j} of the row
 * @param neighbours  length d: e_k e_{k+1} per axis, length²/time²
 * @param driftRowOf  regressors of the drift along an axis, at the row or one row ahead; ask for the axes in order, from 0 on
 */
export type DiffusionVisitor = (
  row: number,
  products: ResidualProducts,
  neighbours: Float64Array,
  driftRowOf: (axis: number, ahead?: number) => SparseRow,
) => void;

/**
 * Visits the rows of the diffusion regression, run after run.
 *
 * @param form  of the diffusion
 * @param drift  basis of the drift, or null
 * @param parameters  drift parameters, length p₁ (empty without a drift)
 * @throws DataError  where no run has the four gap-free positions one row needs
 */
export function visitDiffusionRows(
  tracks: TrackSet,
  form: string,
  drift: Basis | null,
  parameters: Float64Array,
  visit: DiffusionVisitor,
): void {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const driftSize = drift?.functionCount ?? 0;
  const products = new ResidualProducts(form, dimensions, 1, dt / 2);
  const recent = new RecentBasis(drift);
  const driftRow = new SparseRow(drift?.support ?? 0);
  const driftRowOf = (row: number, axis: number): SparseRow => {
    driftRow.clear();
    driftRow.append(axis * driftSize, recent, row, 1);
    return driftRow;
  };
  const runs = findRuns(tracks);
  const residuals = new Float64Array(longestRun(runs) * dimensions);
  const neighbours = new Float64Array(dimensions);
  let rows = 0;
  for (let run = 0; run < runs.starts.length; run++) {
    const start = runs.starts[run];
    const end = runs.ends[run];
    if (end - start < 4) continue;
    for (let row = start; row < end - 1; row++) {
      recent.evaluate(positions, row, dimensions);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        const { indices, values, length } = driftRowOf(row, axis);
        let fitted = 0;
        for (let i = 0; i < length; i++) fitted += values[i] * parameters[indices[i]];
        residuals[(row - start) * dimensions + axis] =
          (positions[at + dimensions] - positions[at]) / dt - fitted;
      }
    }
    for (let row = start + 1; row < end - 2; row++) {
      const at = (row - start) * dimensions;
      recent.evaluate(positions, row, dimensions);
      products.fill(residuals, row - start);
      for (let axis = 0; axis < dimensions; axis++)
        neighbours[axis] = residuals[at + axis] * residuals[at + axis + dimensions];
      visit(row, products, neighbours, (axis, ahead = 0) => {
        if (ahead > 0 && axis === 0) recent.evaluate(positions, row + ahead, dimensions);
        return driftRowOf(row + ahead, axis);
      });
      rows++;
    }
  }
  if (rows === 0) throw tooShort();
}

export function tooShort(): DataError {
  return new DataError(
    'no stretch of 4 gap-free positions at one interval was found, which regression on differences needs at first order; record longer tracks or take --estimator likelihood',
    { needed: 4 },
  );
}

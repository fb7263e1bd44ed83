/**
 * Binned moments of noise or diffusion, with how they move with the coefficients of the first regression.
 *
 * Rows are binned at y_k, and their products look ahead from there (`ResidualProducts.lookAhead`). At first order the
 * diffusion acts from y_k to y_{k+1}: to first order in the interval the mean of D along the step is that of its two ends,
 * (1/Δ) ∫ E[D(q_t)] dt = E[D(q_k) + D(q_{k+1})]/2 + O(Δ²), and so the pairs of knots are kept for both.
 *
 * Source  Itô–Taylor expansion of the squared increment: Kloeden & Platen, Numerical Solution of Stochastic Differential
 *         Equations (1992), ch. 5.
 */

import type { Basis } from '../../fields/Basis.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import { createErrorSums, type ErrorSums, visitDiffusionRows } from '../differences/firstOrder.js';
import type { SecondOrderLayout } from '../differences/forceFriction.js';
import { noisePairs, type ResidualProducts } from '../differences/residualProducts.js';
import { visitNoiseRows } from '../differences/residuals.js';
import { addSensitivity, type SparseRow } from '../differences/sparseRows.js';
import type { EstimationPlan } from '../Estimate.js';
import { type BinnedMoments, type KnotWeights, MomentCollector } from './BinnedMoments.js';
import { type KernelGrid, isInside } from './grid.js';
import { type BlockResiduals, createKnotWeights } from './motionMoments.js';

export interface NoiseMoments {
  readonly moments: BinnedMoments;
  /** Shape (c K, p₁): derivative of the moment vector with respect to the parameters of the first regression. */
  readonly sensitivity: Float64Array;
}

type RowVisitor = (
  row: number,
  products: ResidualProducts,
  regressorsOf: (axis: number, ahead?: number) => SparseRow,
) => void;

/** Visits the rows of the regression; made by `secondOrderRows` or `firstOrderRows`. */
export type NoiseRows = (visit: RowVisitor) => void;

export function secondOrderRows(
  tracks: TrackSet,
  form: string,
  layout: SecondOrderLayout,
  parameters: Float64Array,
): NoiseRows {
  return (visit) =>
    visitNoiseRows(tracks, form, layout, parameters, (row, products, regressorsOf) => {
      products.lookAhead();
      visit(row, products, regressorsOf);
    });
}

/**
 * Rows of first order, with the sums that the localization variance is read from.
 *
 * @param drift  basis of the drift, or null
 */
export function firstOrderRows(
  tracks: TrackSet,
  plan: EstimationPlan,
  drift: Basis | null,
  parameters: Float64Array,
): { rows: NoiseRows; errors: ErrorSums } {
  const { form } = plan.noise;
  const errors = createErrorSums(tracks, plan, drift, parameters);
  visitDiffusionRows(tracks, form, drift, parameters, (row, _products, neighbours) => {
    errors.add(row, neighbours);
  });
  const rows: NoiseRows = (visit) =>
    visitDiffusionRows(tracks, form, drift, parameters, (row, products, _neighbours, driftRowOf) => {
      products.lookAhead();
      visit(row, products, driftRowOf);
    });
  return { rows, errors };
}

/**
 * Collects the moments, in folds of blocks.
 *
 * @param parameterCount  p₁
 */
export function collectNoiseMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  grid: KernelGrid,
  rows: NoiseRows,
  parameterCount: number,
  folds: number,
): NoiseMoments {
  const { positions, dimensions: d } = tracks;
  const components = noisePairs(plan.noise.form, d).length;
  const collector = new MomentCollector(grid.size, 1, components, folds);
  const sensitivity = new Float64Array(components * grid.size * parameterCount);
  const at = createKnotWeights(grid);
  const seen = createSeenWeights(grid, plan.order);
  const one = Float64Array.of(1);
  rows((row, products, regressorsOf) => {
    if (!isInside(grid, positions, row * d)) return;
    at.count = grid.basis.evaluateInto(positions, row * d, at.indices, at.values);
    fillSeen(seen, plan.order, grid, positions, row, at);
    collector.add(plan.blocks.ofPosition[row] % folds, at, seen, one, one, products.responses);
    if (parameterCount === 0) return;
    for (let ahead = 0; ahead <= products.reach; ahead++) {
      products.fillSlopesAhead(ahead);
      for (let axis = 0; axis < d; axis++) {
        const { slopes } = products;
        const regressors = regressorsOf(axis, ahead);
        for (let component = 0; component < components; component++) {
          const slope = slopes[component * d + axis];
          if (slope === 0) continue;
          addSensitivity(
            sensitivity,
            parameterCount,
            component * grid.size,
            at.indices,
            at.values,
            at.count,
            regressors,
            -slope,
          );
        }
      }
    }
  });
  return { moments: collector.finish(), sensitivity };
}

/**
 * Unexplained moments of every block.
 *
 * @param values  noise or diffusion at the knots, shape (c, K)
 */
export function collectNoiseResiduals(
  tracks: TrackSet,
  plan: EstimationPlan,
  grid: KernelGrid,
  rows: NoiseRows,
  values: Float64Array,
): BlockResiduals {
  const { positions, dimensions: d } = tracks;
  const components = values.length / grid.size;
  const { count, ofPosition } = plan.blocks;
  const residuals = Array.from({ length: count }, () => new Float64Array(values.length));
  const counts = Array.from({ length: count }, () => new Float64Array(grid.size));
  const at = createKnotWeights(grid);
  const seen = createSeenWeights(grid, plan.order);
  rows((row, products) => {
    if (!isInside(grid, positions, row * d)) return;
    at.count = grid.basis.evaluateInto(positions, row * d, at.indices, at.values);
    fillSeen(seen, plan.order, grid, positions, row, at);
    const out = residuals[ofPosition[row]];
    for (let i = 0; i < at.count; i++) counts[ofPosition[row]][at.indices[i]] += at.values[i];
    for (let component = 0; component < components; component++) {
      let rest = products.responses[component];
      for (let j = 0; j < seen.count; j++)
        rest -= seen.values[j] * values[component * grid.size + seen.indices[j]];
      for (let i = 0; i < at.count; i++) out[at.indices[i] * components + component] += at.values[i] * rest;
    }
  });
  return { residuals, counts };
}

/** Room for the weights of the place a row acts at; at first order of two places. */
function createSeenWeights(grid: KernelGrid, order: 'first' | 'second'): KnotWeights {
  const capacity = (order === 'first' ? 2 : 1) * grid.basis.support;
  return { indices: new Int32Array(capacity), values: new Float64Array(capacity), count: 0 };
}

/** @param at  weights of the place of the row */
function fillSeen(
  seen: KnotWeights,
  order: 'first' | 'second',
  grid: KernelGrid,
  positions: Float64Array,
  row: number,
  at: KnotWeights,
): void {
  const share = order === 'first' ? 1 / 2 : 1;
  for (let i = 0; i < at.count; i++) {
    seen.indices[i] = at.indices[i];
    seen.values[i] = share * at.values[i];
  }
  seen.count = at.count;
  if (order === 'second') return;
  const values = seen.values.subarray(at.count);
  const count = grid.basis.evaluateInto(
    positions,
    (row + 1) * grid.dimensions,
    seen.indices.subarray(at.count),
    values,
  );
  for (let i = 0; i < count; i++) values[i] *= share;
  seen.count += count;
}

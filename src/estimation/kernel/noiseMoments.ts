/**
 * Binned moments of noise or diffusion, with how they move with the coefficients of the first regression.
 *
 * Rows are binned at y_k, and their products look ahead from there (`ResidualProducts.lookAhead`). At first order they still
 * hold the square of the error of y_k, which is above average where the density of positions is convex; where that matters
 * (`LARGE_ERROR`), rows are binned at y_{k−1}, at the price of more scatter. The diffusion acts from y_k to y_{k+1}: to
 * first order in the interval its mean along the step is that of the two ends,
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

/** The rows of the regression; made by `secondOrderRows` or `firstOrderRows`. */
export interface NoiseRows {
  readonly visit: (visit: RowVisitor) => void;
  /** How many rows before its own a row is binned at. */
  readonly lag: 0 | 1;
}

/**
 * s⁴/(2DΔ σ²) with the spread σ of positions from which rows of first order are binned a row before: binned at y_k, the
 * diffusion is too large by s⁴ ρ″/(2DΔ ρ) of itself, three times this at two standard deviations of a normal density ρ.
 */
const LARGE_ERROR = 0.01;

export function secondOrderRows(
  tracks: TrackSet,
  form: string,
  layout: SecondOrderLayout,
  parameters: Float64Array,
): NoiseRows {
  return {
    lag: 0,
    visit: (visit) =>
      visitNoiseRows(tracks, form, layout, parameters, (row, products, regressorsOf) => {
        products.lookAhead();
        visit(row, products, regressorsOf);
      }),
  };
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
  let diffusion = 0;
  let count = 0;
  visitDiffusionRows(tracks, form, drift, parameters, (row, products, neighbours) => {
    errors.add(row, neighbours);
    diffusion += products.responses[0];
    count++;
  });
  const variance =
    errors.errorSums.reduce((sum, value) => sum + value, 0) /
    errors.errorWeights.reduce((sum, value) => sum + value, 0);
  const displacement = (2 * diffusion * tracks.samplingInterval) / count; // its variance, 2DΔ
  const rows: NoiseRows = {
    lag: variance ** 2 > LARGE_ERROR * displacement * measureSpread(tracks) ? 1 : 0,
    visit: (visit) =>
      visitDiffusionRows(tracks, form, drift, parameters, (row, products, _neighbours, driftRowOf) => {
        products.lookAhead();
        visit(row, products, driftRowOf);
      }),
  };
  return { rows, errors };
}

/** Smallest variance of the positions over the axes, length². */
function measureSpread({ positions, dimensions: d }: TrackSet): number {
  const count = positions.length / d;
  let least = Infinity;
  for (let axis = 0; axis < d; axis++) {
    let sum = 0;
    let squares = 0;
    for (let at = axis; at < positions.length; at += d) {
      const away = positions[at] - positions[axis];
      sum += away;
      squares += away * away;
    }
    least = Math.min(least, squares / count - (sum / count) ** 2);
  }
  return least;
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
  rows.visit((row, products, regressorsOf) => {
    const place = (row - rows.lag) * d;
    if (!isInside(grid, positions, place)) return;
    at.count = grid.basis.evaluateInto(positions, place, at.indices, at.values);
    fillSeen(seen, plan.order, grid, positions, row);
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
  rows.visit((row, products) => {
    const place = (row - rows.lag) * d;
    if (!isInside(grid, positions, place)) return;
    at.count = grid.basis.evaluateInto(positions, place, at.indices, at.values);
    fillSeen(seen, plan.order, grid, positions, row);
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

/** Weights of the places at which the coefficients act on a row. */
function fillSeen(
  seen: KnotWeights,
  order: 'first' | 'second',
  grid: KernelGrid,
  positions: Float64Array,
  row: number,
): void {
  const ends = order === 'first' ? 2 : 1;
  seen.count = 0;
  for (let end = 0; end < ends; end++) {
    const values = seen.values.subarray(seen.count);
    const count = grid.basis.evaluateInto(
      positions,
      (row + end) * grid.dimensions,
      seen.indices.subarray(seen.count),
      values,
    );
    for (let i = 0; i < count; i++) values[i] /= ends;
    seen.count += count;
  }
}

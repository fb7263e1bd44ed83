/**
 * What the residuals of the force–friction regression say of localization error and noise.
 */

import { DataError } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import { findRuns, longestRun } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import type { MomentBlocks } from '../penalizedMoments.js';
import { fillVelocity, RowBuilder, secondDifference, type SecondOrderLayout } from './forceFriction.js';
import { noisePairs, ResidualProducts } from './residualProducts.js';
import { addBasisRow, addSensitivity, createOwnSlopes, type SparseRow } from './sparseRows.js';

/** Residuals of the regression along one run, with the friction seen at each row. */
class RunResiduals {
  /** Shape (rows, d) from the first row of the run; the first and last row have none. */
  readonly residuals: Float64Array;
  /** GΔ/2 per row and axis, limited to ±0.95. */
  readonly halfFriction: Float64Array;
  readonly builder: RowBuilder;
  readonly #velocity: Float64Array;

  constructor(
    private readonly tracks: TrackSet,
    private readonly layout: SecondOrderLayout,
    private readonly parameters: Float64Array,
    longest: number,
  ) {
    this.builder = new RowBuilder(layout);
    this.residuals = new Float64Array(longest * tracks.dimensions);
    this.halfFriction = new Float64Array(longest * tracks.dimensions);
    this.#velocity = new Float64Array(tracks.dimensions);
  }

  /** Fills the arrays for the rows from `start` (included) to `end` (excluded). */
  fill(start: number, end: number): void {
    const { positions, dimensions, samplingInterval: dt } = this.tracks;
    for (let row = start + 1; row < end - 1; row++) {
      for (let axis = 0; axis < dimensions; axis++) {
        const at = (row - start) * dimensions + axis;
        const regressors = this.rowOf(row, axis, axis === 0);
        let fitted = 0;
        let drag = 0;
        for (let i = 0; i < regressors.length; i++) {
          const term = regressors.values[i] * this.parameters[regressors.indices[i]];
          fitted += term;
          if (regressors.indices[i] >= this.layout.frictionOffset) drag -= term;
        }
        const speed = this.#velocity[axis];
        const half = speed === 0 ? 0 : (drag * dt) / (2 * speed);
        this.residuals[at] =
          secondDifference(positions, row * dimensions + axis, dimensions) / (dt * dt) - fitted;
        this.halfFriction[at] =
          this.layout.frictionForm === 'matrix' ? 0 : Math.max(-0.95, Math.min(0.95, half));
      }
    }
  }

  /** Regressors of one axis at a row; `fresh` evaluates the bases there first. */
  rowOf(row: number, axis: number, fresh: boolean): SparseRow {
    const { positions, dimensions, samplingInterval: dt } = this.tracks;
    if (fresh) {
      this.builder.evaluate(positions, row);
      fillVelocity(this.#velocity, positions, row, dimensions, dt);
    }
    this.builder.fill(this.builder.regressors, axis, row, this.#velocity, -1);
    return this.builder.regressors;
  }
}

/** What the residuals say of the localization variance, per axis: s² = Σ numerators / Σ denominators. */
export interface ErrorMoments {
  /** Shape (B, d). */
  readonly numerators: Float64Array;
  readonly denominators: Float64Array;
  /** Shape (d, p): derivative of the summed numerators with respect to the force–friction parameters. */
  readonly sensitivity: Float64Array;
}

/**
 * Localization variance from neighbouring residuals. With u = e Δ², g = GΔ/2 and c = 2 − KΔ², K = −∂F_e/∂q,
 *
 *   E[u_k²] = a₀ N + (2 + 2g² + c²) s²,     E[u_k u_{k+1}] = a₁ N − 2c s²
 *
 * where a₀/a₁ is a known function of ΓΔ (4 for small ΓΔ), so the noise can be eliminated. This is far more precise
 * than the lag-2 product, which localization error alone reaches.
 *
 * Source  a₀, a₁ from the displacement covariances of the free process (Uhlenbeck & Ornstein 1930); the limits 2/3
 *         and 1/6 of a₀/Δ³ and a₁/Δ³: Gloter 2006.
 */
export function collectErrorMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
  parameters: Float64Array,
): ErrorMoments {
  const { dimensions, samplingInterval: dt } = tracks;
  const { count, ofPosition } = plan.blocks;
  const numerators = new Float64Array(count * dimensions);
  const denominators = new Float64Array(count * dimensions);
  const sensitivity = new Float64Array(dimensions * layout.size);
  const runs = findRuns(tracks);
  const run = new RunResiduals(tracks, layout, parameters, longestRun(runs));
  const { residuals, halfFriction } = run;
  const scale = dt ** 4;
  const slopeAt = createOwnSlopes(layout.force, parameters, tracks.positions, dimensions);
  for (let r = 0; r < runs.starts.length; r++) {
    const start = runs.starts[r];
    const end = runs.ends[r];
    if (end - start < 5) continue;
    run.fill(start, end);
    for (let row = start + 2; row < end - 2; row++) {
      for (let axis = 0; axis < dimensions; axis++) {
        const at = (row - start) * dimensions + axis;
        const neighbours = (residuals[at - dimensions] + residuals[at + dimensions]) / 2;
        const half = halfFriction[at];
        const ratio = residualCovarianceRatio(half);
        const slot = ofPosition[row] * dimensions + axis;
        numerators[slot] += scale * residuals[at] * (residuals[at] - ratio * neighbours);
        const middle = 2 + slopeAt(row, axis) * dt * dt;
        denominators[slot] += 2 + 2 * half * half + middle * middle + 2 * middle * ratio;
        // Shifting e_{k±1} back on its own row changes the basis values little: one product stands for both.
        const weight = -scale * 2 * (residuals[at] - ratio * neighbours);
        const regressors = run.rowOf(row, axis, axis === 0);
        const base = axis * layout.size;
        for (let i = 0; i < regressors.length; i++) {
          sensitivity[base + regressors.indices[i]] += weight * regressors.values[i];
        }
      }
    }
  }
  return { numerators, denominators, sensitivity };
}

/**
 * a₀/a₁: variance over lag-one covariance of the residuals of the free process without localization error.
 *
 * @param half  tanh(ΓΔ/2)
 */
export function residualCovarianceRatio(half: number): number {
  const x = 2 * Math.atanh(half);
  if (Math.abs(x) < 0.02) return 4 + 0.2 * x * x; // series; next term below 1e-8
  const e = Math.exp(-x);
  const own = 2 * (x - 1 + e);
  const next = (1 - e) ** 2;
  const variance = (1 + e * e) * own - 2 * e * next;
  return variance / ((1 + e * e) * next - e * (own + e * next));
}

/** Gap-free positions behind one row of the noise regression: five residuals of three positions each, overlapping. */
const NOISE_ROW = 7;

/**
 * Refuses tracks that cannot carry a second-order fit by differences, before anything is computed.
 *
 * @throws DataError  where no run has the seven gap-free positions one row of the noise regression needs
 */
export function checkSecondOrderRuns(tracks: TrackSet): void {
  if (longestRun(findRuns(tracks)) >= NOISE_ROW) return;
  throw new DataError(
    `no stretch of ${NOISE_ROW} gap-free positions at one interval was found, which regression on differences needs at second order; record longer tracks or take --estimator likelihood`,
    { needed: NOISE_ROW },
  );
}

/** What the residuals of the regression say of the noise. */
export interface NoiseMoments extends MomentBlocks {
  /** Shape (p₂, p₁): how the total moment vector moves with the parameters of the first regression. */
  readonly sensitivity: Float64Array;
}

/**
 * Moment conditions of the effective noise L(q) = Δ Σ_{|j|≤2} e_k e_{k+j}, block by block.
 *
 * Noise components: scalar (mean over the axes), axes, or matrix (upper triangle, symmetrised).
 *
 * @param tracks  with at least one run of seven positions (`checkSecondOrderRuns`)
 * @param parameters  force–friction parameters, length p₁
 */
export function collectNoiseMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
  basis: Basis,
  parameters: Float64Array,
): NoiseMoments {
  const { positions, dimensions } = tracks;
  const { count, ofPosition } = plan.blocks;
  const k = basis.functionCount;
  const components = noisePairs(plan.noise.form, dimensions).length;
  const p = components * k;
  const matrices = Array.from({ length: count }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: count }, () => new Float64Array(p));
  const total = new Float64Array(p * p);
  const sensitivity = new Float64Array(p * layout.size);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  visitNoiseRows(tracks, plan.noise.form, layout, parameters, (row, products, regressorsOf) => {
    const block = ofPosition[row];
    const found = basis.evaluateInto(positions, row * dimensions, indices, values);
    products.responses.forEach((response, component) => {
      addBasisRow(matrices[block], vectors[block], total, p, component * k, indices, values, found, response);
    });
    for (let axis = 0; axis < dimensions; axis++) {
      const regressors = regressorsOf(axis);
      for (let component = 0; component < components; component++) {
        const slope = products.slopes[component * dimensions + axis];
        if (slope === 0) continue;
        addSensitivity(sensitivity, layout.size, component * k, indices, values, found, regressors, -slope);
      }
    }
  });
  return { size: p, matrices, vectors, instrumentGram: total, sensitivity };
}

/**
 * What is done with one row of the noise regression.
 *
 * @param products  with the responses Δ Σ_{|j|≤2} e_k e_{k+j} of the row
 * @param regressorsOf  regressors of the force–friction regression along an axis; ask for the axes in order, from 0 on
 */
export type NoiseVisitor = (
  row: number,
  products: ResidualProducts,
  regressorsOf: (axis: number) => SparseRow,
) => void;

/**
 * Visits the rows of the noise regression, run after run.
 *
 * @param form  of the noise
 * @param parameters  force–friction parameters, length p₁
 */
export function visitNoiseRows(
  tracks: TrackSet,
  form: string,
  layout: SecondOrderLayout,
  parameters: Float64Array,
  visit: NoiseVisitor,
): void {
  const products = new ResidualProducts(form, tracks.dimensions, 2, tracks.samplingInterval);
  const runs = findRuns(tracks);
  const run = new RunResiduals(tracks, layout, parameters, longestRun(runs));
  for (let r = 0; r < runs.starts.length; r++) {
    const start = runs.starts[r];
    const end = runs.ends[r];
    if (end - start < NOISE_ROW) continue;
    run.fill(start, end);
    for (let row = start + 3; row < end - 3; row++) {
      products.fill(run.residuals, row - start);
      visit(row, products, (axis) => run.rowOf(row, axis, axis === 0));
    }
  }
}

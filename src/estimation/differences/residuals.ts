/**
 * What the residuals of the force–friction regression say of localization error and noise.
 */

import { DataError } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import { compileOwnSlopes, compileSums } from '../../fields/compileSums.js';
import type { SumEvaluator } from '../../fields/splineCells.js';
import { findRuns, longestRun, orderRuns, type Runs } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import { fillVelocity, RowBuilder, secondDifference, type SecondOrderLayout } from './forceFriction.js';
import { type NoiseMoments, NoiseSums } from './noiseSums.js';
import { addValues, BasisRow, sameBasis } from './pairSums.js';
import { noisePairs, ResidualProducts } from './residualProducts.js';
import type { SparseRow } from './sparseRows.js';

/** Fitted force and friction, read at places. */
class FittedMotion {
  /** Length d: force, length/time². */
  readonly force: Float64Array;
  /** One per friction component, 1/time. */
  readonly friction: Float64Array;
  readonly #readForce: SumEvaluator | null;
  readonly #readFriction: SumEvaluator | null;

  constructor(layout: SecondOrderLayout, parameters: Float64Array) {
    const { force, friction, dimensions, frictionOffset, frictionComponents } = layout;
    this.force = new Float64Array(dimensions);
    this.friction = new Float64Array(frictionComponents);
    this.#readForce = force && compileSums(force, componentsOf(force, parameters, 0, dimensions));
    this.#readFriction =
      friction &&
      compileSums(friction, componentsOf(friction, parameters, frictionOffset, frictionComponents));
  }

  read(place: Float64Array): void {
    this.#readForce?.(place, this.force, 0);
    this.#readFriction?.(place, this.friction, 0);
  }
}

/** Coefficients of several components of a field that stand one after another from `offset` on. */
function componentsOf(basis: Basis, parameters: Float64Array, offset: number, count: number): number[][] {
  const k = basis.functionCount;
  return Array.from({ length: count }, (_, component) =>
    Array.from(parameters.subarray(offset + component * k, offset + (component + 1) * k)),
  );
}

/** Residuals of the regression along one run, with the friction seen at each row. */
class RunResiduals {
  /** Shape (rows, d) from the first row of the run; the first and last row have none. */
  readonly residuals: Float64Array;
  /** GΔ/2 per row and axis, limited to ±0.95. */
  readonly halfFriction: Float64Array;
  readonly #motion: FittedMotion;
  readonly #builder: RowBuilder;
  readonly #velocity: Float64Array;
  readonly #place: Float64Array;

  constructor(
    private readonly tracks: TrackSet,
    private readonly layout: SecondOrderLayout,
    parameters: Float64Array,
    longest: number,
  ) {
    this.#motion = new FittedMotion(layout, parameters);
    this.#builder = new RowBuilder(layout);
    this.residuals = new Float64Array(longest * tracks.dimensions);
    this.halfFriction = new Float64Array(longest * tracks.dimensions);
    this.#velocity = new Float64Array(tracks.dimensions);
    this.#place = new Float64Array(tracks.dimensions);
  }

  /** Fills the arrays for the rows from `start` (included) to `end` (excluded). */
  fill(start: number, end: number): void {
    const { positions, dimensions: d, samplingInterval: dt } = this.tracks;
    const { frictionForm } = this.layout;
    const { force, friction } = this.#motion;
    const [place, velocity] = [this.#place, this.#velocity];
    for (let row = start + 1; row < end - 1; row++) {
      for (let axis = 0; axis < d; axis++) place[axis] = positions[row * d + axis];
      this.#motion.read(place);
      fillVelocity(velocity, positions, row, d, dt);
      for (let axis = 0; axis < d; axis++) {
        const at = (row - start) * d + axis;
        let fitted = force[axis];
        let half = 0;
        if (frictionForm === 'matrix') {
          for (let other = 0; other < d; other++) fitted -= friction[axis * d + other] * velocity[other];
        } else {
          const own = friction[frictionForm === 'axes' ? axis : 0];
          fitted -= own * velocity[axis];
          half = (own * dt) / 2;
        }
        this.residuals[at] = secondDifference(positions, row * d + axis, d) / (dt * dt) - fitted;
        this.halfFriction[at] = half > 0.95 ? 0.95 : half < -0.95 ? -0.95 : half;
      }
    }
  }

  /** Regressors of one axis at a row; `fresh` evaluates the bases there first. */
  rowOf(row: number, axis: number, fresh: boolean): SparseRow {
    const { positions, dimensions, samplingInterval: dt } = this.tracks;
    if (fresh) {
      this.#builder.evaluate(positions, row);
      fillVelocity(this.#velocity, positions, row, dimensions, dt);
    }
    this.#builder.fill(this.#builder.regressors, axis, row, this.#velocity, -1);
    return this.#builder.regressors;
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
  const { dimensions: d, samplingInterval: dt } = tracks;
  const { count, ofPosition } = plan.blocks;
  const numerators = new Float64Array(count * d);
  const denominators = new Float64Array(count * d);
  visitErrorRows(tracks, layout, parameters, (row, products, halves, ratios, slopes) => {
    const slot = ofPosition[row] * d;
    for (let axis = 0; axis < d; axis++) {
      const middle = 2 + slopes[axis] * dt * dt;
      numerators[slot + axis] += products[axis];
      denominators[slot + axis] +=
        2 + 2 * halves[axis] * halves[axis] + middle * middle + 2 * middle * ratios[axis];
    }
  });
  let sensitivity: Float64Array | null = null;
  return {
    numerators,
    denominators,
    get sensitivity() {
      sensitivity ??= collectErrorSensitivity(tracks, layout, parameters);
      return sensitivity;
    },
  };
}

/** Derivative of the summed numerators with respect to the parameters, shape (d, p). */
function collectErrorSensitivity(
  tracks: TrackSet,
  layout: SecondOrderLayout,
  parameters: Float64Array,
): Float64Array {
  const { dimensions: d, positions, samplingInterval: dt } = tracks;
  const { force, friction, frictionForm, frictionComponents: components, frictionOffset, size } = layout;
  const forceRow = force && new BasisRow(force);
  const shared = force && friction && sameBasis(force, friction);
  const frictionRow = shared ? forceRow : friction && new BasisRow(friction);
  const forceSums = new Float64Array((force?.functionCount ?? 0) * d);
  const drags = new Float64Array(d * components); // axis × component
  const frictionSums = new Float64Array((friction?.functionCount ?? 0) * drags.length);
  const velocity = new Float64Array(d);
  visitErrorRows(tracks, layout, parameters, (row, _products, _halves, _ratios, _slopes, pulls) => {
    if (forceRow) {
      forceRow.evaluate(positions, row);
      addValues(forceSums, forceRow, pulls);
    }
    if (!frictionRow) return;
    if (!shared) frictionRow.evaluate(positions, row);
    fillVelocity(velocity, positions, row, d, dt);
    for (let axis = 0; axis < d; axis++) {
      const at = axis * components;
      if (frictionForm === 'matrix') {
        for (let other = 0; other < d; other++) drags[at + axis * d + other] = -pulls[axis] * velocity[other];
      } else {
        drags[at + (frictionForm === 'axes' ? axis : 0)] = -pulls[axis] * velocity[axis];
      }
    }
    addValues(frictionSums, frictionRow, drags);
  });
  const sensitivity = new Float64Array(d * size);
  const kF = force?.functionCount ?? 0;
  const k = friction?.functionCount ?? 0;
  for (let axis = 0; axis < d; axis++) {
    for (let i = 0; i < kF; i++) sensitivity[axis * size + axis * kF + i] = forceSums[i * d + axis];
    for (let i = 0; i < k * components; i++) {
      const component = Math.floor(i / k);
      sensitivity[axis * size + frictionOffset + i] =
        frictionSums[(i - component * k) * drags.length + axis * components + component];
    }
  }
  return sensitivity;
}

/**
 * One row from which the localization variance is read; everything per axis.
 *
 * @param products  u_k (u_k − (a₀/a₁) ū), with ū the mean of the neighbouring u
 * @param halves  GΔ/2;  @param ratios  a₀/a₁;  @param slopes  ∂F_e/∂q
 * @param pulls  derivative of the product with respect to a fitted value. Shifting e_{k±1} back on its own row changes
 *   the basis values little: one product stands for both
 */
type ErrorVisitor = (
  row: number,
  products: Float64Array,
  halves: Float64Array,
  ratios: Float64Array,
  slopes: Float64Array,
  pulls: Float64Array,
) => void;

function visitErrorRows(
  tracks: TrackSet,
  layout: SecondOrderLayout,
  parameters: Float64Array,
  visit: ErrorVisitor,
): void {
  const { positions, dimensions: d, samplingInterval: dt } = tracks;
  const runs = findRuns(tracks);
  const run = new RunResiduals(tracks, layout, parameters, longestRun(runs));
  const { residuals, halfFriction } = run;
  const scale = dt ** 4;
  const readSlopes =
    layout.force && compileOwnSlopes(layout.force, componentsOf(layout.force, parameters, 0, d));
  const [place, products, halves, ratios, slopes, pulls] = Array.from(
    { length: 6 },
    () => new Float64Array(d),
  );
  for (let r = 0; r < runs.starts.length; r++) {
    const start = runs.starts[r];
    const end = runs.ends[r];
    if (end - start < 5) continue;
    run.fill(start, end);
    for (let row = start + 2; row < end - 2; row++) {
      for (let axis = 0; axis < d; axis++) {
        const at = (row - start) * d + axis;
        const half = halfFriction[at];
        // A scalar friction is the same for every axis, and so is all that follows from it.
        if (axis === 0 || half !== halves[axis - 1]) ratios[axis] = residualCovarianceRatio(half);
        else ratios[axis] = ratios[axis - 1];
        halves[axis] = half;
        const rest = residuals[at] - (ratios[axis] * (residuals[at - d] + residuals[at + d])) / 2;
        products[axis] = scale * residuals[at] * rest;
        pulls[axis] = -2 * scale * rest;
        place[axis] = positions[row * d + axis];
      }
      readSlopes?.(place, slopes, 0);
      visit(row, products, halves, ratios, slopes, pulls);
    }
  }
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
  const { positions } = tracks;
  const { count, ofPosition } = plan.blocks;
  const components = noisePairs(plan.noise.form, tracks.dimensions).length;
  const sums = new NoiseSums(tracks, layout, basis, components, count);
  const runs = orderRuns(findRuns(tracks), ofPosition);
  visitNoiseRows(
    tracks,
    plan.noise.form,
    layout,
    parameters,
    (row, products) => sums.add(positions, row, ofPosition[row], products),
    runs,
  );
  return sums.moments();
}

/**
 * What is done with one row of the noise regression.
 *
 * @param products  with the responses Δ Σ_{|j|≤2} e_k e_{k+j} of the row
 * @param regressorsOf  regressors of the force–friction regression along an axis, at the row or up to two rows ahead; ask
 *   for the axes in order, from 0 on
 */
export type NoiseVisitor = (
  row: number,
  products: ResidualProducts,
  regressorsOf: (axis: number, ahead?: number) => SparseRow,
) => void;

/**
 * Visits the rows of the noise regression, run after run.
 *
 * @param form  of the noise
 * @param parameters  force–friction parameters, length p₁
 * @param runs  of the tracks, in the order in which they are to be visited
 */
export function visitNoiseRows(
  tracks: TrackSet,
  form: string,
  layout: SecondOrderLayout,
  parameters: Float64Array,
  visit: NoiseVisitor,
  runs: Runs = findRuns(tracks),
): void {
  const products = new ResidualProducts(form, tracks.dimensions, 2, tracks.samplingInterval);
  const run = new RunResiduals(tracks, layout, parameters, longestRun(runs));
  for (let r = 0; r < runs.starts.length; r++) {
    const start = runs.starts[r];
    const end = runs.ends[r];
    if (end - start < NOISE_ROW) continue;
    run.fill(start, end);
    for (let row = start + 3; row < end - 3; row++) {
      products.fill(run.residuals, row - start);
      visit(row, products, (axis, ahead = 0) => run.rowOf(row + ahead, axis, axis === 0));
    }
  }
}

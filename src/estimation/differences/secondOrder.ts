/**
 * Second order by differences: lagged instruments for force and friction, the long-run variance of the residuals for
 * the noise. Free of localization error and motion blur, and of the friction × interval bias, by construction.
 *
 * With interval Δ, second difference D_k, central velocity v_k = (y_{k+1} − y_{k−1})/(2Δ):
 *
 *   D_k/Δ² = F_e(q_k) − G(q_k) v_k + e_k,    instruments built from y_{k−2} and y_{k−3}
 *
 * because e_k holds process noise from t_{k−1} on and the localization errors of y_{k−1}, y_k, y_{k+1} only. The e_k
 * are correlated up to lag 2, so their long-run variance is L = Σ_{|j|≤2} E[e_k e_{k+j}]. `correctInterval` turns the
 * effective F_e, G, L into force, friction and noise.
 *
 * Source  instruments: Söderström & Stoica, Instrumental variable methods for system identification (1983); variances
 *         of second differences: Gloter, Parameter estimation for a discretely observed integrated diffusion process,
 *         Scand. J. Stat. 33 (2006) 83; Samson & Thieullen, Stoch. Process. Appl. 122 (2012) 2521.
 */

import { DataError } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import { createBasis } from '../../fields/createBasis.js';
import { findRuns } from '../../tracks/runs.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import type { MomentBlocks } from '../penalizedMoments.js';
import { addBasisRow, addOuterProducts, addSensitivity, RecentBasis, SparseRow } from './sparseRows.js';

/** Where each coefficient's parameters stand in the vector of the force–friction regression. */
export interface SecondOrderLayout {
  readonly dimensions: number;
  readonly force: Basis | null;
  readonly friction: Basis | null;
  readonly frictionForm: 'scalar' | 'axes' | 'matrix';
  readonly frictionComponents: number;
  readonly frictionOffset: number;
  readonly size: number;
}

/** Lays out the parameters: force per axis, then friction per component. */
export function layOutSecondOrder(plan: EstimationPlan, dimensions: number): SecondOrderLayout {
  const force = plan.force.basis && createBasis(plan.force.basis, dimensions);
  const friction = plan.friction.basis && createBasis(plan.friction.basis, dimensions);
  const frictionForm = plan.friction.form === 'vector' ? 'scalar' : plan.friction.form;
  const frictionComponents = { scalar: 1, axes: dimensions, matrix: dimensions ** 2 }[frictionForm];
  const frictionOffset = dimensions * (force?.functionCount ?? 0);
  return {
    dimensions,
    force,
    friction,
    frictionForm,
    frictionComponents,
    frictionOffset,
    size: frictionOffset + frictionComponents * (friction?.functionCount ?? 0),
  };
}

/** Builds the regressors and instruments of one axis at one row. */
class RowBuilder {
  readonly regressors: SparseRow;
  readonly instruments: SparseRow;
  readonly #force: RecentBasis;
  readonly #friction: RecentBasis;
  readonly #layout: SecondOrderLayout;

  constructor(layout: SecondOrderLayout) {
    this.#layout = layout;
    this.#force = new RecentBasis(layout.force);
    this.#friction = new RecentBasis(layout.friction);
    const capacity = (layout.force?.support ?? 0) + layout.dimensions * (layout.friction?.support ?? 0);
    this.regressors = new SparseRow(capacity);
    this.instruments = new SparseRow(capacity);
  }

  evaluate(positions: Float64Array, row: number): void {
    this.#force.evaluate(positions, row, this.#layout.dimensions);
    this.#friction.evaluate(positions, row, this.#layout.dimensions);
  }

  /** Fills `target` with the force functions and the friction functions times `sign` × velocity at `row`. */
  fill(target: SparseRow, axis: number, row: number, velocity: Float64Array, sign: number): void {
    const { force, friction, frictionForm, frictionOffset, dimensions } = this.#layout;
    target.clear();
    if (force) target.append(axis * force.functionCount, this.#force, row, 1);
    if (!friction) return;
    if (frictionForm === 'matrix') {
      for (let other = 0; other < dimensions; other++) {
        const component = axis * dimensions + other;
        const offset = frictionOffset + component * friction.functionCount;
        target.append(offset, this.#friction, row, sign * velocity[other]);
      }
    } else {
      const component = frictionForm === 'axes' ? axis : 0;
      target.append(frictionOffset + component * friction.functionCount, this.#friction, row, sign * velocity[axis]);
    }
  }
}

/**
 * Moment conditions of the force–friction regression, block by block.
 *
 * @throws DataError  where no run has the five gap-free positions one row needs
 *
 * Cost  O(n d support²) time, O(B p²) memory.
 */
export function collectForceFrictionMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
): MomentBlocks {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const p = layout.size;
  const { count, ofPosition } = plan.blocks;
  const matrices = Array.from({ length: count }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: count }, () => new Float64Array(p));
  const instrumentGram = new Float64Array(p * p);
  const builder = new RowBuilder(layout);
  const { regressors, instruments } = builder;
  const velocity = new Float64Array(dimensions);
  const earlier = new Float64Array(dimensions);
  const runs = findRuns(tracks);
  let rows = 0;

  for (let run = 0; run < runs.starts.length; run++) {
    const start = runs.starts[run];
    const end = runs.ends[run];
    if (end - start < 5) continue;
    for (let row = start + 1; row < start + 3; row++) builder.evaluate(positions, row);
    for (let row = start + 3; row < end - 1; row++) {
      builder.evaluate(positions, row);
      const here = row * dimensions;
      for (let axis = 0; axis < dimensions; axis++) {
        const at = here + axis;
        velocity[axis] = (positions[at + dimensions] - positions[at - dimensions]) / (2 * dt);
        earlier[axis] = (positions[at - 2 * dimensions] - positions[at - 3 * dimensions]) / dt;
      }
      const matrix = matrices[ofPosition[row]];
      const vector = vectors[ofPosition[row]];
      for (let axis = 0; axis < dimensions; axis++) {
        const at = here + axis;
        const acceleration =
          (positions[at + dimensions] - 2 * positions[at] + positions[at - dimensions]) / (dt * dt);
        builder.fill(regressors, axis, row, velocity, -1);
        builder.fill(instruments, axis, row - 2, earlier, -1);
        addOuterProducts(matrix, vector, instrumentGram, p, instruments, regressors, acceleration);
      }
      rows++;
    }
  }
  if (rows === 0) {
    throw new DataError(
      'no stretch of 5 gap-free positions at one interval was found, which the differences estimator needs at second order; record longer tracks or take --estimator likelihood',
      { needed: 5 },
    );
  }
  return { size: p, matrices, vectors, instrumentGram };
}

/** What the residuals of the regression say of the noise. */
export interface NoiseMoments extends MomentBlocks {
  /** Shape (p₂, p₁): how the total moment vector moves with the force–friction parameters. */
  readonly sensitivity: Float64Array;
  /** Per block and axis: Σ e_k e_{k+2} Δ⁴ / (1 − (GΔ/2)²) and how many; its mean is the localization variance. */
  readonly errorVariance: { readonly sums: Float64Array; readonly counts: Float64Array };
}

/**
 * Moment conditions of the effective noise L(q) = Δ Σ_{|j|≤2} e_k e_{k+j}, block by block.
 *
 * Noise components: scalar (mean over the axes), axes, or matrix (upper triangle, symmetrised).
 *
 * @param parameters  force–friction parameters, length p₁
 * @throws DataError  where no run has the seven gap-free positions one row needs
 */
export function collectNoiseMoments(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
  basis: Basis,
  parameters: Float64Array,
): NoiseMoments {
  const { positions, dimensions, samplingInterval: dt } = tracks;
  const { count: blockCount, ofPosition } = plan.blocks;
  const k = basis.functionCount;
  const pairs = noisePairs(plan.noise.form, dimensions);
  const p = pairs.length * k;
  const matrices = Array.from({ length: blockCount }, () => new Float64Array(p * p));
  const vectors = Array.from({ length: blockCount }, () => new Float64Array(p));
  const total = new Float64Array(p * p);
  const sensitivity = new Float64Array(p * layout.size);
  const sums = new Float64Array(blockCount * dimensions);
  const counts = new Float64Array(blockCount);
  const builder = new RowBuilder(layout);
  const row1 = builder.regressors;
  const velocity = new Float64Array(dimensions);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const runs = findRuns(tracks);
  let longest = 0;
  for (let run = 0; run < runs.starts.length; run++) longest = Math.max(longest, runs.ends[run] - runs.starts[run]);
  const residuals = new Float64Array(longest * dimensions);
  const damping = new Float64Array(longest * dimensions);
  const windows = new Float64Array(dimensions);
  let rows = 0;

  for (let run = 0; run < runs.starts.length; run++) {
    const start = runs.starts[run];
    const end = runs.ends[run];
    if (end - start < 7) continue;
    for (let row = start + 1; row < end - 1; row++) {
      builder.evaluate(positions, row);
      fillVelocity(velocity, positions, row, dimensions, dt);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        const acceleration =
          (positions[at + dimensions] - 2 * positions[at] + positions[at - dimensions]) / (dt * dt);
        builder.fill(row1, axis, row, velocity, -1);
        let fitted = 0;
        let drag = 0;
        for (let i = 0; i < row1.length; i++) {
          const term = row1.values[i] * parameters[row1.indices[i]];
          fitted += term;
          if (row1.indices[i] >= layout.frictionOffset) drag -= term;
        }
        residuals[(row - start) * dimensions + axis] = acceleration - fitted;
        damping[(row - start) * dimensions + axis] = velocity[axis] === 0 ? 0 : drag / velocity[axis];
      }
    }
    for (let row = start + 3; row < end - 3; row++) {
      const local = (row - start) * dimensions;
      const block = ofPosition[row];
      const found = basis.evaluateInto(positions, row * dimensions, indices, values);
      fillVelocity(velocity, positions, row, dimensions, dt);
      builder.evaluate(positions, row);
      for (let axis = 0; axis < dimensions; axis++) {
        const at = local + axis;
        windows[axis] =
          residuals[at - 2 * dimensions] +
          residuals[at - dimensions] +
          residuals[at] +
          residuals[at + dimensions] +
          residuals[at + 2 * dimensions];
        const half = Math.min(0.95, Math.abs((damping[at] * dt) / 2));
        sums[block * dimensions + axis] +=
          (residuals[at - dimensions] * residuals[at + dimensions] * dt ** 4) / (1 - half * half);
      }
      counts[block]++;
      for (let component = 0; component < pairs.length; component++) {
        let response = 0;
        for (const [a, b] of pairs[component]) {
          response += (residuals[local + a] * windows[b] + residuals[local + b] * windows[a]) / 2;
        }
        response *= dt / pairs[component].length;
        addBasisRow(matrices[block], vectors[block], total, p, component * k, indices, values, found, response);
        for (const [a, b] of pairs[component]) {
          for (const [axis, other] of a === b ? [[a, b]] : [[a, b], [b, a]]) {
            builder.fill(row1, axis, row, velocity, -1);
            const weight = ((a === b ? -2 : -1) * windows[other] * dt) / pairs[component].length;
            addSensitivity(sensitivity, layout.size, component * k, indices, values, found, row1, weight);
          }
        }
      }
      rows++;
    }
  }
  if (rows === 0) {
    throw new DataError(
      'no stretch of 7 gap-free positions at one interval was found, which the differences estimator needs for the noise; record longer tracks or take --estimator likelihood',
      { needed: 7 },
    );
  }
  return { size: p, matrices, vectors, instrumentGram: total, sensitivity, errorVariance: { sums, counts } };
}

/** Axis pairs whose residual products make up each noise component. */
export function noisePairs(form: string, dimensions: number): [number, number][][] {
  const axes = Array.from({ length: dimensions }, (_, axis) => axis);
  if (form === 'axes') return axes.map((axis) => [[axis, axis]]);
  if (form === 'matrix') return axes.flatMap((a) => axes.slice(a).map((b): [number, number][] => [[a, b]]));
  return [axes.map((axis): [number, number] => [axis, axis])];
}

function fillVelocity(velocity: Float64Array, positions: Float64Array, row: number, d: number, dt: number): void {
  for (let axis = 0; axis < d; axis++) {
    const at = row * d + axis;
    velocity[axis] = (positions[at + d] - positions[at - d]) / (2 * dt);
  }
}

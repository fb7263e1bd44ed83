/**
 * Force and friction with localization error known only from the residuals: the regression gives the residuals, these
 * give the localization variance, which in turn corrects the regression, until neither changes.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import type { EstimationPlan } from '../Estimate.js';
import {
  type MomentBlocks,
  type MomentSolution,
  type PenaltyGroup,
  solvePenalizedMoments,
} from '../penalizedMoments.js';
import type { SecondOrderLayout } from './forceFriction.js';
import { collectForceFrictionMoments, type ForceFrictionMoments } from './forceFrictionMoments.js';
import { collectErrorMoments, type ErrorMoments } from './residuals.js';
import { invertMatrix } from '../../numerics/linear/smallMatrix.js';

export interface ForceFrictionSolution {
  readonly parameters: Float64Array;
  /** Shape (B, p). */
  readonly influences: Float64Array;
  /** Localization variance per axis, length² (may come out slightly negative), and its influences, shape (B, d). */
  readonly errorVariance: Float64Array;
  readonly errorInfluences: Float64Array;
  readonly regression: MomentSolution;
  /** Whether variance and regression agreed before the rounds ran out. */
  readonly converged: boolean;
}

const ROUNDS = 20; // at friction × interval 1 each leaves a sixth of the error
const TOLERANCE = 1e-6; // of the localization variance and of the scale of the residuals; far inside the error

/**
 * Solves for force and friction.
 *
 * The second velocity instrument (lag 1) is used unless the exposure smears process noise into it.
 *
 * @throws DataError  where no stretch is long enough
 */
export function solveForceFriction(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: SecondOrderLayout,
  groups: readonly PenaltyGroup[],
): ForceFrictionSolution {
  const d = tracks.dimensions;
  const given = plan.localizationError && Float64Array.from(plan.localizationError, (error) => error * error);
  const lag = plan.exposure > 0 || !layout.friction ? 2 : 1;
  const moments = collectForceFrictionMoments(tracks, plan, layout, lag);
  let strengths: readonly number[] | undefined;
  const { regression, errors, variance, converged } = settleErrorVariance<MomentSolution>(
    given,
    lag,
    d,
    (trial, settled) => {
      const corrected = lag === 1 ? correctForError(moments, layout, trial, tracks) : moments;
      const solution = solvePenalizedMoments(corrected, groups, settled ? strengths : undefined);
      strengths = solution.strengths;
      return solution;
    },
    (parameters) => collectErrorMoments(tracks, plan, layout, parameters),
  );
  const shift = lag === 1 && !given ? errorShift(moments, layout, regression, tracks) : null;
  return {
    parameters: regression.parameters,
    errorVariance: variance,
    ...joinInfluences(regression, errors, variance, shift, given !== null, d),
    regression,
    converged,
  };
}

/**
 * Regression and localization variance that agree with each other.
 *
 * @param given  localization variance per axis where it is known, length²
 * @param lag  of the velocity instrument: with 2 the regression does not depend on the variance
 * @param solve  the regression for a trial variance; `settled` is false until the variance has had its first correction,
 *   when the smoothing is worth choosing afresh
 * @param measure  what the residuals for given parameters say of the variance
 */
export function settleErrorVariance<Regression extends { readonly parameters: Float64Array }>(
  given: Float64Array | null,
  lag: 1 | 2,
  d: number,
  solve: (variance: Float64Array, settled: boolean) => Regression,
  measure: (parameters: Float64Array) => ErrorMoments,
): { regression: Regression; errors: ErrorMoments; variance: Float64Array; converged: boolean } {
  // Without a known error, start from none: friction is then too low, but the residuals are close enough to begin.
  let variance: Float64Array = Float64Array.from(given ?? new Float64Array(d));
  let regression = solve(variance, false);
  let errors = measure(regression.parameters);
  if (given) return { regression, errors, variance, converged: true };
  if (lag === 2) return { regression, errors, variance: ratioPerAxis(errors, d), converged: true };
  let converged = false;
  for (let round = 0; round < ROUNDS && !converged; round++) {
    const next = ratioPerAxis(errors, d);
    const last = variance;
    converged = next.every(
      (value, axis) => Math.abs(value - last[axis]) <= TOLERANCE * residualScale(errors, axis, d),
    );
    variance = next;
    regression = solve(variance, round > 0);
    errors = measure(regression.parameters);
  }
  return { regression, errors, variance, converged };
}

function ratioPerAxis(errors: ErrorMoments, d: number): Float64Array {
  const out = new Float64Array(d);
  for (let axis = 0; axis < d; axis++) {
    out[axis] = sumEvery(errors.numerators, d, axis) / sumEvery(errors.denominators, d, axis);
  }
  return out;
}

function residualScale(errors: ErrorMoments, axis: number, d: number): number {
  let size = 0;
  for (let i = axis; i < errors.numerators.length; i += d) size += Math.abs(errors.numerators[i]);
  return size / sumEvery(errors.denominators, d, axis);
}

function sumEvery(values: Float64Array, stride: number, offset: number): number {
  let sum = 0;
  for (let i = offset; i < values.length; i += stride) sum += values[i];
  return sum;
}

/**
 * Takes the error of y_{k−1} off the moments: the friction rows gain s²/(2Δ²) Σ c c' on the matrix and s²/Δ³ Σ c on
 * the vector.
 */
function correctForError(
  moments: ForceFrictionMoments,
  layout: SecondOrderLayout,
  variance: Float64Array,
  tracks: TrackSet,
): MomentBlocks {
  const k = layout.friction?.functionCount ?? 0;
  const p = layout.size;
  const dt = tracks.samplingInterval;
  const matrices = moments.matrices.map((matrix) => matrix.slice());
  const vectors = moments.vectors.map((vector) => vector.slice());
  for (const { component, axis, direct } of frictionRows(layout)) {
    const offset = layout.frictionOffset + component * k;
    for (let block = 0; block < matrices.length; block++) {
      const products = moments.frictionProducts[block];
      const sums = moments.frictionSums[block];
      for (let i = 0; i < k; i++) {
        if (direct) vectors[block][offset + i] += (variance[axis] / dt ** 3) * sums[i];
        const base = (offset + i) * p + offset;
        for (let j = 0; j < k; j++)
          matrices[block][base + j] += (variance[axis] / (2 * dt * dt)) * products[i * k + j];
      }
    }
  }
  return { size: p, matrices, vectors, instrumentGram: moments.instrumentGram };
}

/** Friction components and the axis whose localization error reaches their instrument. */
function frictionRows(layout: SecondOrderLayout): { component: number; axis: number; direct: boolean }[] {
  const axes = Array.from({ length: layout.dimensions }, (_, axis) => axis);
  if (layout.frictionForm === 'scalar') return axes.map((axis) => ({ component: 0, axis, direct: true }));
  if (layout.frictionForm === 'axes') return axes.map((axis) => ({ component: axis, axis, direct: true }));
  return axes.flatMap((row) =>
    axes.map((axis) => ({ component: row * layout.dimensions + axis, axis, direct: row === axis })),
  );
}

/** Derivative of the parameters with respect to each axis' localization variance, shape (d, p). */
function errorShift(
  moments: ForceFrictionMoments,
  layout: SecondOrderLayout,
  regression: MomentSolution,
  tracks: TrackSet,
): Float64Array {
  const p = layout.size;
  const k = layout.friction?.functionCount ?? 0;
  const d = layout.dimensions;
  const dt = tracks.samplingInterval;
  const change = new Float64Array(d * p);
  for (const { component, axis, direct } of frictionRows(layout)) {
    const offset = layout.frictionOffset + component * k;
    for (let block = 0; block < moments.frictionSums.length; block++) {
      for (let i = 0; i < k; i++) {
        let value = direct ? moments.frictionSums[block][i] / dt ** 3 : 0;
        for (let j = 0; j < k; j++) {
          value -=
            (moments.frictionProducts[block][i * k + j] * regression.parameters[offset + j]) / (2 * dt * dt);
        }
        change[axis * p + offset + i] += value;
      }
    }
  }
  const shift = new Float64Array(d * p);
  for (let axis = 0; axis < d; axis++) {
    for (let i = 0; i < p; i++) {
      let sum = 0;
      for (let j = 0; j < p; j++) sum += regression.bread[i * p + j] * change[axis * p + j];
      shift[axis * p + i] = sum;
    }
  }
  return shift;
}

/**
 * Block effects on parameters θ and localization variances s² together. With θ = Θ(data, s²) and s² = Σ(data, θ),
 * ds² = (1 − Σ_θ Θ_s)⁻¹ (dΣ + Σ_θ dΘ) and dθ = dΘ + Θ_s ds².
 *
 * @param shift  Θ_s, shape (d, p); null where the regression does not depend on the variance
 * @param given  whether the variance was known beforehand
 */
export function joinInfluences(
  regression: Pick<MomentSolution, 'parameters' | 'influences'>,
  errors: ErrorMoments,
  variance: Float64Array,
  shift: Float64Array | null,
  given: boolean,
  d: number,
): { influences: Float64Array; errorInfluences: Float64Array } {
  const p = regression.parameters.length;
  const blocks = regression.influences.length / p;
  const influences = regression.influences.slice();
  const errorInfluences = new Float64Array(blocks * d);
  if (given) return { influences, errorInfluences };
  const totals = Float64Array.from({ length: d }, (_, axis) => sumEvery(errors.denominators, d, axis));
  const loop = new Float64Array(d * d);
  for (let a = 0; a < d; a++) {
    for (let b = 0; b < d; b++) {
      let back = 0;
      if (shift) for (let i = 0; i < p; i++) back += errors.sensitivity[a * p + i] * shift[b * p + i];
      loop[a * d + b] = (a === b ? 1 : 0) - back / totals[a];
    }
  }
  const solve = invertMatrix(loop, d);
  const own = new Float64Array(d);
  for (let block = 0; block < blocks; block++) {
    for (let axis = 0; axis < d; axis++) {
      const slot = block * d + axis;
      let moved = errors.numerators[slot] - variance[axis] * errors.denominators[slot];
      for (let i = 0; i < p; i++)
        moved += errors.sensitivity[axis * p + i] * regression.influences[block * p + i];
      own[axis] = moved / totals[axis];
    }
    for (let axis = 0; axis < d; axis++) {
      let sum = 0;
      for (let other = 0; other < d; other++) sum += solve[axis * d + other] * own[other];
      errorInfluences[block * d + axis] = sum;
      if (!shift) continue;
      for (let i = 0; i < p; i++) influences[block * p + i] += shift[axis * p + i] * sum;
    }
  }
  return { influences, errorInfluences };
}

/**
 * The differences estimator: two linear regressions (force with friction, then noise; or drift, then diffusion), each
 * with cross-validated roughness penalties, followed by the exact correction for the finite interval.
 *
 * Raw parameters are the effective coefficients; `toModelParameters` corrects them, so that the bootstrap carries the
 * correction along.
 */

import type { Warning } from '../../errors.js';
import type { Basis } from '../../fields/Basis.js';
import type { CoefficientField, FieldForm, FieldName, Model } from '../../fields/CoefficientField.js';
import { createBasis } from '../../fields/createBasis.js';
import { withParameters } from '../../fields/modelParameters.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../Estimate.js';
import { type MomentSolution, type PenaltyGroup, solvePenalizedMoments } from '../penalizedMoments.js';
import { collectDiffusionMoments, collectDriftMoments, driftBasis, type ErrorSums } from './firstOrder.js';
import { createIntervalCorrection } from './intervalCorrection.js';
import { layOutSecondOrder } from './forceFriction.js';
import type { NoiseMoments } from './noiseSums.js';
import { checkSecondOrderRuns, collectNoiseMoments } from './residuals.js';
import { solveForceFriction } from './solveForceFriction.js';

/**
 * Estimates the model by differences.
 *
 * @param plan  `noise.basis` must not be null
 * @throws DataError  where the tracks have no stretch long enough
 * @throws NumericalError  where the data cannot tell the functions apart
 */
export function estimateDifferences(tracks: TrackSet, plan: EstimationPlan): Estimate {
  const { dimensions } = tracks;
  if (!plan.noise.basis) throw new TypeError('the noise needs a basis');
  const noiseBasis = createBasis(plan.noise.basis, dimensions);
  const second = plan.order === 'second';
  if (second) checkSecondOrderRuns(tracks);

  const layout = layOutSecondOrder(plan, dimensions);
  const drift = driftBasis(plan, dimensions);
  const groups: PenaltyGroup[] = [];
  if (layout.force) pushGroup(groups, layout.force, 0, dimensions, plan.force);
  if (second && layout.friction)
    pushGroup(groups, layout.friction, layout.frictionOffset, layout.frictionComponents, plan.friction);

  let motion: MotionPart = NO_MOTION;
  let moments: NoiseMoments;
  let localization: ErrorVariance;
  const warnings: Warning[] = [];
  if (second) {
    if (layout.size > 0) {
      const solved = solveForceFriction(tracks, plan, layout, groups);
      motion = { ...solved.regression, influences: solved.influences };
      localization = { variance: solved.errorVariance, influences: solved.errorInfluences };
      if (!solved.converged) warnings.push(UNCONVERGED);
    } else {
      const variance = Float64Array.from(
        plan.localizationError ?? new Float64Array(dimensions),
        (s) => s * s,
      );
      localization = { variance, influences: new Float64Array(plan.blocks.count * dimensions) };
    }
    moments = collectNoiseMoments(tracks, plan, layout, noiseBasis, motion.parameters);
  } else {
    if (drift) motion = solvePenalizedMoments(collectDriftMoments(tracks, plan, drift), groups);
    const diffusion = collectDiffusionMoments(tracks, plan, drift, noiseBasis, motion.parameters);
    localization = firstOrderError(diffusion, plan, dimensions);
    moments = diffusion;
  }
  const noiseGroups: PenaltyGroup[] = [];
  pushGroup(noiseGroups, noiseBasis, 0, moments.size / noiseBasis.functionCount, plan.noise);
  const noise = solvePenalizedMoments(moments, noiseGroups);

  const parameters = joined(motion.parameters, noise.parameters);
  const model = templateModel(tracks, plan);
  const correction = createIntervalCorrection(tracks, plan, model, Array.from(localization.variance));
  const conditioning = Math.max(motion.conditioning, noise.conditioning);
  return {
    model: withParameters(model, correction.correct(parameters)),
    parameters,
    influences: joinInfluences(motion, noise, moments, plan.blocks.count),
    smoothingFactor: joinFactors(motion, noise),
    toModelParameters: (raw) => correction.correct(raw),
    localizationError: describeError(localization, plan, dimensions),
    diagnostics: {
      estimator: 'differences',
      converged: warnings.length === 0,
      parameters: parameters.length,
      effectiveParameters: motion.effectiveParameters + noise.effectiveParameters,
      roughnessStrengths: [...motion.strengths, ...noise.strengths],
      conditioning,
    },
    warnings: [...warnings, ...conditioningWarnings(conditioning)],
  };
}

/** What later steps need of the force–friction or drift regression. */
type MotionPart = Pick<
  MomentSolution,
  'parameters' | 'influences' | 'smoothingFactor' | 'strengths' | 'effectiveParameters' | 'conditioning'
>;

const NO_MOTION: MotionPart = {
  parameters: new Float64Array(0),
  influences: new Float64Array(0),
  smoothingFactor: null,
  strengths: [],
  effectiveParameters: 0,
  conditioning: 1,
};

/** Localization variance per axis with the effect of each block on it, shape (B, d). */
export interface ErrorVariance {
  readonly variance: Float64Array;
  readonly influences: Float64Array;
}

export const UNCONVERGED: Warning = {
  code: 'not-converged',
  message:
    'localization error and friction did not settle on each other; give the localization error with --localization-error, or record more positions',
};

/** Of the information per parameter: smooths a function only where it has less than a tenth of the others' data. */
export const LIGHT_SMOOTHING = 0.1;

function pushGroup(
  groups: PenaltyGroup[],
  basis: Basis,
  offset: number,
  copies: number,
  field: FieldPlan,
): void {
  const roughness = basis.roughness();
  if (!roughness) return;
  groups.push({
    offsets: Array.from({ length: copies }, (_, copy) => offset + copy * basis.functionCount),
    roughness,
    functionCount: basis.functionCount,
    fixedStrength: field.smoothing === 'light' ? LIGHT_SMOOTHING : undefined,
  });
}

export function joined(first: Float64Array, second: Float64Array): Float64Array {
  const out = new Float64Array(first.length + second.length);
  out.set(first);
  out.set(second, first.length);
  return out;
}

/**
 * Block effects on both regressions together: a block that moves force and friction also moves the residuals the
 * noise is read from.
 */
function joinInfluences(
  motion: MotionPart,
  noise: MomentSolution,
  moments: NoiseMoments,
  blocks: number,
): Float64Array {
  const p1 = motion.parameters.length;
  const p2 = noise.parameters.length;
  const out = new Float64Array(blocks * (p1 + p2));
  const shift = new Float64Array(p2);
  for (let block = 0; block < blocks; block++) {
    const base = block * (p1 + p2);
    for (let i = 0; i < p1; i++) out[base + i] = motion.influences[block * p1 + i];
    for (let i = 0; i < p2; i++) {
      let sum = 0;
      for (let j = 0; j < p1; j++) sum += moments.sensitivity[i * p1 + j] * motion.influences[block * p1 + j];
      shift[i] = sum;
    }
    for (let i = 0; i < p2; i++) {
      let sum = noise.influences[block * p2 + i];
      for (let j = 0; j < p2; j++) sum += noise.inverse[i * p2 + j] * shift[j];
      out[base + p1 + i] = sum;
    }
  }
  return out;
}

function joinFactors(motion: MotionPart, noise: MomentSolution): Estimate['smoothingFactor'] {
  const p1 = motion.parameters.length;
  const parts = [
    { factor: motion.smoothingFactor, offset: 0, size: p1 },
    { factor: noise.smoothingFactor, offset: p1, size: noise.parameters.length },
  ];
  const columns = parts.reduce((sum, part) => sum + (part.factor?.columns ?? 0), 0);
  if (columns === 0) return null;
  const values = new Float64Array((p1 + noise.parameters.length) * columns);
  let at = 0;
  for (const { factor, offset, size } of parts) {
    if (!factor) continue;
    for (let i = 0; i < size; i++) {
      for (let c = 0; c < factor.columns; c++) {
        values[(offset + i) * columns + at + c] = factor.values[i * factor.columns + c];
      }
    }
    at += factor.columns;
  }
  return { values, columns };
}

/** First order: the localization variance is minus the covariance of neighbouring residuals. */
export function firstOrderError(moments: ErrorSums, plan: EstimationPlan, d: number): ErrorVariance {
  const blocks = plan.blocks.count;
  const influences = new Float64Array(blocks * d);
  if (plan.localizationError)
    return { variance: Float64Array.from(plan.localizationError, (s) => s * s), influences };
  const { errorSums, errorWeights } = moments;
  const variance = new Float64Array(d);
  for (let axis = 0; axis < d; axis++) {
    let weight = 0;
    for (let slot = axis; slot < errorSums.length; slot += d) {
      variance[axis] += errorSums[slot];
      weight += errorWeights[slot];
    }
    variance[axis] /= weight;
    for (let slot = axis; slot < errorSums.length; slot += d) {
      influences[slot] = (errorSums[slot] - variance[axis] * errorWeights[slot]) / weight;
    }
  }
  return { variance, influences };
}

/** Standard deviation of the localization error per axis, with its standard error over the blocks. */
export function describeError(
  error: ErrorVariance,
  plan: EstimationPlan,
  d: number,
): Estimate['localizationError'] {
  return Array.from({ length: d }, (_, axis) => {
    let spread = 0;
    for (let block = 0; block < plan.blocks.count; block++) spread += error.influences[block * d + axis] ** 2;
    const varianceError = Math.sqrt(spread);
    const value = Math.sqrt(Math.max(0, error.variance[axis]));
    // Near zero the square root flattens: the error of s is then what makes s² one standard error.
    const standardError =
      spread === 0 ? 0 : varianceError / (value + Math.sqrt(value * value + varianceError));
    return { value, standardError };
  });
}

/** The model with its bases and zero coefficients. */
export function templateModel(tracks: TrackSet, plan: EstimationPlan): Model {
  const { dimensions, periods } = tracks;
  const field = (
    name: FieldName,
    fieldPlan: FieldPlan,
    form: FieldForm,
    components: number,
  ): CoefficientField => {
    const basis = fieldPlan.basis ?? { kind: 'constant' as const };
    const k = createBasis(basis, dimensions).functionCount;
    const coefficients = Array.from({ length: components }, () => new Array<number>(k).fill(0));
    return { name, form, link: 'identity', basis, coefficients };
  };
  const noiseComponents = {
    scalar: 1,
    axes: dimensions,
    matrix: (dimensions * (dimensions + 1)) / 2,
    vector: 0,
  };
  const noise = (name: FieldName) =>
    field(name, plan.noise, plan.noise.form, noiseComponents[plan.noise.form]);
  if (plan.order === 'first') {
    return {
      order: 'first',
      reading: 'ito',
      dimensions,
      periods,
      drift: field('drift', plan.force, 'vector', dimensions),
      diffusion: noise('diffusion'),
    };
  }
  const layout = layOutSecondOrder(plan, dimensions);
  return {
    order: 'second',
    dimensions,
    periods,
    force: field('force', plan.force, 'vector', dimensions),
    friction: field('friction', plan.friction, layout.frictionForm, layout.frictionComponents),
    noise: noise('noise'),
  };
}

/** Beyond this the normal equations lose half of the digits of a double. */
const POOR_CONDITIONING = 1e12;

function conditioningWarnings(conditioning: number): Warning[] {
  if (conditioning < POOR_CONDITIONING) return [];
  return [
    {
      code: 'poorly-conditioned',
      message: `the regression can hardly tell its functions apart (condition number above ${conditioning.toExponential(0)}); fewer functions per axis would be safer`,
    },
  ];
}

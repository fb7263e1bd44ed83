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
import { collectDiffusionMoments, collectDriftMoments, driftBasis } from './firstOrder.js';
import { createIntervalCorrection } from './intervalCorrection.js';
import { collectForceFrictionMoments, collectNoiseMoments, layOutSecondOrder, type NoiseMoments } from './secondOrder.js';

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

  // first regression: force and friction, or drift
  const layout = layOutSecondOrder(plan, dimensions);
  const drift = driftBasis(plan, dimensions);
  const motionSize = second ? layout.size : dimensions * (drift?.functionCount ?? 0);
  const groups: PenaltyGroup[] = [];
  if (layout.force) pushGroup(groups, layout.force, 0, dimensions);
  if (second && layout.friction) pushGroup(groups, layout.friction, layout.frictionOffset, layout.frictionComponents);
  let motion: MomentSolution | null = null;
  if (motionSize > 0) {
    const moments =
      second || !drift
        ? collectForceFrictionMoments(tracks, plan, layout)
        : collectDriftMoments(tracks, plan, drift);
    motion = solvePenalizedMoments(moments, groups);
  }
  const motionParameters = motion?.parameters ?? new Float64Array(0);

  // second regression: noise or diffusion
  const noiseMoments = second
    ? collectNoiseMoments(tracks, plan, layout, noiseBasis, motionParameters)
    : collectDiffusionMoments(tracks, plan, drift, noiseBasis, motionParameters);
  const noiseGroups: PenaltyGroup[] = [];
  pushGroup(noiseGroups, noiseBasis, 0, noiseMoments.size / noiseBasis.functionCount);
  const noise = solvePenalizedMoments(noiseMoments, noiseGroups);

  const parameters = joined(motionParameters, noise.parameters);
  const influences = joinInfluences(motion, noise, noiseMoments, plan.blocks.count);
  const localizationError = errorOf(noiseMoments, plan, dimensions);
  const model = templateModel(tracks, plan);
  const correction = createIntervalCorrection(tracks, plan, model, localizationError.map((axis) => axis.value ** 2));
  const corrected = correction.correct(parameters);
  return {
    model: withParameters(model, corrected),
    parameters,
    influences,
    smoothingFactor: joinFactors(motion, noise, motionParameters.length),
    toModelParameters: (raw) => correction.correct(raw),
    localizationError,
    diagnostics: {
      estimator: 'differences',
      effectiveParameters: (motion?.effectiveParameters ?? 0) + noise.effectiveParameters,
      parameters: parameters.length,
      roughnessStrengths: [...(motion?.strengths ?? []), ...noise.strengths],
      conditioning: Math.max(motion?.conditioning ?? 1, noise.conditioning),
    },
    warnings: conditioningWarnings(motion, noise),
  };
}

function pushGroup(groups: PenaltyGroup[], basis: Basis, offset: number, copies: number): void {
  const roughness = basis.roughness();
  if (!roughness) return;
  groups.push({
    offsets: Array.from({ length: copies }, (_, copy) => offset + copy * basis.functionCount),
    roughness,
    functionCount: basis.functionCount,
  });
}

function joined(first: Float64Array, second: Float64Array): Float64Array {
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
  motion: MomentSolution | null,
  noise: MomentSolution,
  moments: NoiseMoments,
  blocks: number,
): Float64Array {
  const p1 = motion?.parameters.length ?? 0;
  const p2 = noise.parameters.length;
  const out = new Float64Array(blocks * (p1 + p2));
  const shift = new Float64Array(p2);
  for (let block = 0; block < blocks; block++) {
    const base = block * (p1 + p2);
    for (let i = 0; i < p2; i++) out[base + p1 + i] = noise.influences[block * p2 + i];
    if (!motion) continue;
    for (let i = 0; i < p1; i++) out[base + i] = motion.influences[block * p1 + i];
    for (let i = 0; i < p2; i++) {
      let sum = 0;
      for (let j = 0; j < p1; j++) sum += moments.sensitivity[i * p1 + j] * motion.influences[block * p1 + j];
      shift[i] = sum;
    }
    for (let i = 0; i < p2; i++) {
      let sum = 0;
      for (let j = 0; j < p2; j++) sum += noise.inverse[i * p2 + j] * shift[j];
      out[base + p1 + i] += sum;
    }
  }
  return out;
}

function joinFactors(motion: MomentSolution | null, noise: MomentSolution, p1: number): Estimate['smoothingFactor'] {
  const parts = [
    { factor: motion?.smoothingFactor ?? null, offset: 0, size: p1 },
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

/** Localization error per axis from the lag that only it reaches, with a standard error from the blocks. */
function errorOf(moments: NoiseMoments, plan: EstimationPlan, dimensions: number): Estimate['localizationError'] {
  const { sums, counts } = moments.errorVariance;
  return Array.from({ length: dimensions }, (_, axis) => {
    if (plan.localizationError) return { value: plan.localizationError[axis], standardError: 0 };
    let total = 0;
    let rows = 0;
    for (let block = 0; block < counts.length; block++) {
      total += sums[block * dimensions + axis];
      rows += counts[block];
    }
    const variance = total / rows;
    let spread = 0;
    for (let block = 0; block < counts.length; block++) {
      spread += (sums[block * dimensions + axis] - variance * counts[block]) ** 2;
    }
    const varianceError = Math.sqrt(spread) / rows;
    const value = Math.sqrt(Math.max(0, variance));
    // Near zero the square root flattens: the error of s is then what makes s² one standard error.
    return { value, standardError: varianceError / (value + Math.sqrt(value * value + varianceError)) };
  });
}

/** The model with its bases and zero coefficients. */
export function templateModel(tracks: TrackSet, plan: EstimationPlan): Model {
  const { dimensions, periods } = tracks;
  const field = (name: FieldName, fieldPlan: FieldPlan, form: FieldForm, components: number): CoefficientField => {
    const basis = fieldPlan.basis ?? { kind: 'constant' as const };
    const k = createBasis(basis, dimensions).functionCount;
    const coefficients = Array.from({ length: components }, () => new Array<number>(k).fill(0));
    return { name, form, link: 'identity', basis, coefficients };
  };
  const noiseComponents = { scalar: 1, axes: dimensions, matrix: (dimensions * (dimensions + 1)) / 2, vector: 0 };
  const noise = (name: FieldName) => field(name, plan.noise, plan.noise.form, noiseComponents[plan.noise.form]);
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

function conditioningWarnings(motion: MomentSolution | null, noise: MomentSolution): Warning[] {
  const worst = Math.max(motion?.conditioning ?? 1, noise.conditioning);
  if (worst < POOR_CONDITIONING) return [];
  return [
    {
      code: 'poorly-conditioned',
      message: `the regression can hardly tell its functions apart (condition number above ${worst.toExponential(0)}); fewer functions per axis would be safer`,
    },
  ];
}

/**
 * The raw material of every challenge: standardised innovations of the model class, estimated by likelihood, with their
 * scores along smooth changes of the coefficients.
 *
 * An innovation is the recorded position less its prediction from all earlier positions of the track, over the standard
 * deviation of that prediction (localization error included). In a right model innovations are independent standard
 * normals, whatever the coefficients; every challenge looks for a way in which they are not.
 */

import type { FitResult } from '../../documents/FitDocument.js';
import type { Estimate, EstimationPlan } from '../../estimation/Estimate.js';
import { createPathPass } from '../../estimation/likelihood/createPathPass.js';
import { layOutLikelihood, type LikelihoodLayout } from '../../estimation/likelihood/layout.js';
import { estimateLikelihood } from '../../estimation/likelihood/estimateLikelihood.js';
import { modelFields } from '../../fields/modelParameters.js';
import { createBasis } from '../../fields/createBasis.js';
import { partOf, type ReportShare } from '../../numerics/ReportShare.js';
import { countPositions, type TrackSet } from '../../tracks/TrackSet.js';
import { pickOccupancyNodes, planFlexibly } from '../flexibleEstimate.js';
import { projectOnBasis } from '../imposeField.js';
import { findOccupancyModes, type OccupancyModes } from '../occupancyModes.js';

export interface Innovations {
  readonly tracks: TrackSet;
  readonly order: 'first' | 'second';
  readonly estimate: Estimate;
  /** Shape (n, d); NaN where a position only starts the prediction. */
  readonly values: Float64Array;
  /**
   * Shape (n, r): derivative of each row's log-likelihood along smooth changes of every coefficient and of the
   * localization error. What estimating the coefficients does to the innovations, challenges discount along these.
   */
  readonly scores: Float64Array;
  readonly scoreCount: number;
}

const NODES = 1000;
const ESTIMATE_SHARE = 0.6; // of the time; the rest goes to the scores
const MODES = 6; // of each coefficient: what sums over the whole recording can feel of it
const STEP = 0.3; // standard errors over which scores are taken: short against curvature, long against rounding

/**
 * Estimates the fit's model class by likelihood on smooth functions and measures its innovations.
 *
 * @param tracks  the recording the fit was made from
 */
export function measureInnovations(fit: FitResult, tracks: TrackSet, onProgress?: ReportShare): Innovations {
  const { order } = fit.model;
  const flexible = planFlexibly(fit, tracks, []);
  const usable = flexible.tracks;
  const n = countPositions(usable);
  const plan: EstimationPlan = {
    ...flexible.plan,
    friction: withoutMatrix(flexible.plan.friction),
    noise: withoutMatrix(flexible.plan.noise),
    pointOnly: true,
    onProgress: partOf(onProgress, 0, ESTIMATE_SHARE),
  };
  const estimate = estimateLikelihood(usable, plan);
  const errorEstimated = plan.localizationError === null && usable.localizationErrors === null;
  const zero = { force: plan.force.basis === null, friction: plan.friction.basis === null };
  const layout = layOutLikelihood(estimate.model, zero, errorEstimated);
  const setting = {
    blockOfPosition: plan.blocks.ofPosition,
    blocks: plan.blocks.count,
    knownError: plan.localizationError,
  };
  const pass = createPathPass(usable, layout, setting, plan.exposure);
  const run = (parameters: Float64Array): { values: Float64Array; variances: Float64Array } => {
    const values = new Float64Array(n * usable.dimensions).fill(Number.NaN);
    const variances = new Float64Array(n * usable.dimensions).fill(Number.NaN);
    pass.run(parameters, null, { innovations: values, innovationVariances: variances });
    return { values, variances };
  };
  const nodes = pickOccupancyNodes(flexible, NODES);
  const modes = findOccupancyModes(flexible.basis, nodes, fit.visited, MODES);
  const directions = listDirections(layout, estimate, nodes, modes);
  const scores = new Float64Array(n * directions.length);
  const tellScores = partOf(onProgress, ESTIMATE_SHARE, 1);
  directions.forEach((direction, j) => {
    const above = run(estimate.parameters.map((value, i) => value + direction[i]));
    const below = run(estimate.parameters.map((value, i) => value - direction[i]));
    for (let at = 0; at < above.values.length; at++) {
      // log-likelihood −½ (log variance + z²), in units of the step
      const rise =
        Math.log(below.variances[at] / above.variances[at]) + below.values[at] ** 2 - above.values[at] ** 2;
      if (rise === rise) scores[Math.floor(at / usable.dimensions) * directions.length + j] += rise / 4;
    }
    tellScores?.((j + 1) / directions.length);
  });
  return {
    tracks: usable,
    order,
    estimate,
    values: run(estimate.parameters).values,
    scores,
    scoreCount: directions.length,
  };
}

/** The likelihood takes friction and noise along the axes; a matrix is looked at along them. */
function withoutMatrix(field: EstimationPlan['friction']): EstimationPlan['friction'] {
  return field.form === 'matrix' ? { ...field, form: 'axes' } : field;
}

/**
 * Changes of the parameters that follow a smooth mode in one component of a coefficient, or move one error variance,
 * each by about a standard error.
 */
function listDirections(
  layout: LikelihoodLayout,
  estimate: Estimate,
  nodes: Float64Array,
  modes: OccupancyModes,
): Float64Array[] {
  const { dimensions: d, model, size, errorOffset, force, friction } = layout;
  const directions: Float64Array[] = [];
  const add = (direction: Float64Array): void => {
    const scale = STEP * measureSpread(estimate, direction);
    if (scale > 0) directions.push(direction.map((value) => scale * value));
  };
  let offset = 0;
  for (const field of modelFields(model)) {
    const k = createBasis(field.basis, d).functionCount;
    const isZero =
      (field.name === force.field.name && force.basis < 0) ||
      (field.name === friction?.field.name && friction.basis < 0);
    const weights = isZero ? [] : projectOnBasis(field.basis, nodes, modes.atNodes, d);
    for (let component = 0; component < field.coefficients.length; component++) {
      for (const weight of weights) {
        const direction = new Float64Array(size);
        direction.set(weight, offset + component * k);
        add(direction);
      }
    }
    offset += field.coefficients.length * k;
  }
  for (let axis = 0; errorOffset >= 0 && axis < d; axis++) {
    const direction = new Float64Array(size);
    direction[errorOffset + axis] = 1;
    add(direction);
  }
  return directions;
}

/** Standard error of the estimate along a direction, the other directions held: 1/√(dᵀ I d) with I⁻¹ ≈ Σ ψ ψᵀ. */
function measureSpread({ influences, parameters }: Estimate, direction: Float64Array): number {
  const p = parameters.length;
  let length = 0;
  let along = 0;
  for (let i = 0; i < p; i++) length += direction[i] ** 2;
  for (let start = 0; start < influences.length; start += p) {
    let sum = 0;
    for (let i = 0; i < p; i++) sum += influences[start + i] * direction[i];
    along += sum * sum;
  }
  return length > 0 ? Math.sqrt(along) / length : 0;
}

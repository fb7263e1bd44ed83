/**
 * The likelihood estimator: state-space quasi-likelihood of the recorded positions, with the coefficients of each step
 * read at the place the filter predicts. Friction, noise and diffusion are exponentials of their weighted sums, hence
 * positive by construction; roughness penalties are chosen by marginal likelihood.
 */

import type { Warning } from '../../errors.js';
import { withParameters } from '../../fields/modelParameters.js';
import { meanErrorVariances } from '../../tracks/meanErrorVariances.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import { describeVisited } from '../../tracks/visitedRegion.js';
import { LIGHT_SMOOTHING, templateModel } from '../differences/estimateDifferences.js';
import type { Estimate, EstimationPlan } from '../Estimate.js';
import { blockEffects } from './blockEffects.js';
import { createPathPass, isJoint } from './createPathPass.js';
import { expectInformation } from './expectedInformation.js';
import { gatherPlaces } from './gatherPlaces.js';
import { createSpectralInformation } from './joint/spectralInformation.js';
import { type FieldSlot, layOutLikelihood, type LikelihoodLayout, orderByPlace } from './layout.js';
import { createAxisInformation } from './localInformation.js';
import { withLogLinks } from './positiveLinks.js';
import type { PassSetting, PathPass } from './PathPass.js';
import { respondTo } from './response.js';
import { type Pull, type ScoringSolution, solveScores } from './scoring.js';
import { measureFlow } from './measureFlow.js';
import { measureMotion } from './measureMotion.js';
import { measureSensitivity, planSensitivity } from './sensitivity.js';
import { decomposePenalty, factorOfSmoothing, type SpectralPenalty } from './smoothingFactor.js';
import { findStart } from './startValues.js';

const FLOOR = 1e-7; // smallest localization error variance, relative to the mean squared displacement per step
const LONGEST_STEP = 2; // of the logarithm of an error variance: near zero its information is no guide
const PULL = 0.2; // precision of a logarithm: one standard deviation is a factor of nine
const HELD = 1e12; // information that leaves no step worth speaking of
const MOST_STEPS = 2e7; // position and axis times passes that the sensitivity of the score may take
const WIDEST = 40; // |log| of positive coefficients and variances stays below; nothing recorded spans e^40

/**
 * Estimates the model by likelihood.
 *
 * @throws DataError  where no track ever moves
 * @throws NumericalError  where the data cannot tell the functions apart
 */
export function estimateLikelihood(tracks: TrackSet, plan: EstimationPlan): Estimate {
  const model = withLogLinks(templateModel(tracks, plan));
  const errorEstimated = plan.localizationError === null && tracks.localizationErrors === null;
  const zero = { force: plan.force.basis === null, friction: plan.friction.basis === null };
  const layout = layOutLikelihood(model, zero, errorEstimated);
  const setting: PassSetting = {
    blockOfPosition: plan.blocks.ofPosition,
    blocks: plan.blocks.count,
    knownError: plan.localizationError,
  };
  const floors = measureFloors(tracks);
  const pass = createPathPass(tracks, layout, setting, plan.exposure);
  const local = isJoint(layout, plan.exposure)
    ? createSpectralInformation(layout, plan.exposure, tracks.samplingInterval)
    : createAxisInformation(layout);
  const flow = plan.order === 'second' ? measureFlow(tracks, describeVisited(tracks)) : null;
  const places = gatherPlaces(tracks, layout, flow);
  const groups = listPenalties(layout, plan);
  const start = findStart(tracks, plan, layout, floors);
  const solution = solveScores(
    {
      size: layout.size,
      blocks: plan.blocks.count,
      groups,
      pull: pullToMean(layout, start),
      order: orderByPlace(layout),
      evaluate: (parameters, scores) => pass.run(parameters, scores),
      information: (parameters, onTheWay) => {
        const matrix = expectInformation(places, layout, setting, local, parameters);
        if (onTheWay) holdAtFloor(matrix, layout, parameters, floors);
        return matrix;
      },
      confine: (parameters, from) => confine(parameters, from, layout, floors),
      onProgress: plan.onProgress,
    },
    start,
    plan.start?.strengths.length === groups.length ? plan.start.strengths : [],
  );
  const { parameters } = solution;
  const response = plan.pointOnly
    ? solution.inverse
    : measureResponse(tracks, layout, pass, plan.blocks.count, solution);
  return {
    model: withParameters(model, parameters.subarray(0, layout.modelSize)),
    parameters,
    influences: blockEffects(tracks, layout, setting, solution, response),
    smoothingFactor: factorOfSmoothing(solution, groups, response),
    toModelParameters: (raw) => raw.slice(0, layout.modelSize),
    localizationError: describeErrors(tracks, plan, layout, solution, floors),
    diagnostics: {
      estimator: 'likelihood',
      converged: solution.converged,
      iterations: solution.iterations,
      logLikelihood: solution.logLikelihood,
      parameters: layout.size,
      effectiveParameters: solution.effectiveParameters,
      roughnessStrengths: Array.from(solution.strengths),
    },
    warnings: solution.converged ? [] : [UNCONVERGED],
  };
}

const UNCONVERGED: Warning = {
  code: 'not-converged',
  message:
    'the likelihood had not settled when the iterations ran out; take the result with care, use fewer functions, or compare with --estimator differences',
};

/** How the estimate answers to the score: measured where that takes a few seconds at most. */
function measureResponse(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  pass: PathPass,
  blocks: number,
  solution: ScoringSolution,
): Float64Array {
  const plan = planSensitivity(layout);
  if (plan.groups.length * tracks.positions.length > MOST_STEPS) return solution.inverse;
  return respondTo(measureSensitivity(pass, plan, solution, blocks), solution);
}

/** Smallest localization error variance per axis: far below anything that would show. */
function measureFloors(tracks: TrackSet): Float64Array {
  return measureMotion(tracks).steps.map((step) => Math.max(FLOOR * step, Number.MIN_VALUE));
}

function confine(
  parameters: Float64Array,
  from: Float64Array,
  layout: LikelihoodLayout,
  floors: Float64Array,
): void {
  for (const slot of [layout.friction, layout.noise]) {
    if (!slot || slot.basis < 0) continue;
    const end = slot.offset + slot.components * slot.functionCount;
    for (let i = slot.offset; i < end; i++)
      parameters[i] = Math.min(Math.max(parameters[i], -WIDEST), WIDEST);
  }
  if (layout.errorOffset < 0) return;
  for (let axis = 0; axis < layout.dimensions; axis++) {
    const i = layout.errorOffset + axis;
    const reach = Math.min(Math.max(parameters[i], from[i] - LONGEST_STEP), from[i] + LONGEST_STEP);
    parameters[i] = Math.min(Math.max(reach, Math.log(floors[axis])), WIDEST);
  }
}

/**
 * Holds logarithms of friction, noise and diffusion within about a factor of ten of their typical value where no data
 * speak: weaker by far than a single visit of some frames, it keeps straight lines from running off at the edges.
 */
function pullToMean(layout: LikelihoodLayout, start: Float64Array): Pull {
  const precision = new Float64Array(layout.size);
  const centre = new Float64Array(layout.size);
  for (const slot of [layout.friction, layout.noise]) {
    if (!slot || slot.basis < 0 || layout.bases[slot.basis].spec.kind !== 'spline') continue;
    const k = slot.functionCount;
    for (let from = slot.offset; from < slot.offset + slot.components * k; from += k) {
      const mean = start.subarray(from, from + k).reduce((sum, value) => sum + value, 0) / k;
      precision.fill(PULL, from, from + k);
      centre.fill(mean, from, from + k);
    }
  }
  return { precision, centre };
}

/**
 * Takes an error variance that has come down to its floor out of the iteration: it would go on below, and drag the
 * others along with a step it cannot take.
 */
function holdAtFloor(
  matrix: Float64Array,
  layout: LikelihoodLayout,
  parameters: Float64Array,
  floors: Float64Array,
): void {
  if (layout.errorOffset < 0) return;
  const p = layout.size;
  for (let axis = 0; axis < layout.dimensions; axis++) {
    const i = layout.errorOffset + axis;
    if (parameters[i] > Math.log(2 * floors[axis])) continue;
    for (let j = 0; j < p; j++) matrix[i * p + j] = matrix[j * p + i] = 0;
    matrix[i * p + i] = HELD;
  }
}

function listPenalties(layout: LikelihoodLayout, plan: EstimationPlan): SpectralPenalty[] {
  const groups: SpectralPenalty[] = [];
  const push = (slot: FieldSlot | null, smoothing: EstimationPlan['force']['smoothing']): void => {
    if (!slot || slot.basis < 0) return;
    const roughness = layout.bases[slot.basis].roughness();
    if (!roughness) return;
    const k = slot.functionCount;
    const spectrum = decomposePenalty(roughness, k);
    groups.push({
      offsets: Array.from({ length: slot.components }, (_, component) => slot.offset + component * k),
      roughness,
      functionCount: k,
      fixedStrength: smoothing === 'light' ? LIGHT_SMOOTHING : undefined,
      rank: spectrum.values.length,
      spectrum,
    });
  };
  push(layout.force, plan.force.smoothing);
  push(layout.friction, plan.friction.smoothing);
  push(layout.noise, plan.noise.smoothing);
  return groups;
}

function describeErrors(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: LikelihoodLayout,
  { parameters, inverse }: ScoringSolution,
  floors: Float64Array,
): Estimate['localizationError'] {
  const d = layout.dimensions;
  const table = meanErrorVariances(tracks);
  return Array.from({ length: d }, (_, axis) => {
    if (layout.errorOffset < 0)
      return { value: plan.localizationError?.[axis] ?? Math.sqrt(table?.[axis] ?? 0), standardError: 0 };
    const i = layout.errorOffset + axis;
    const variance = Math.exp(parameters[i]);
    const value = variance > 2 * floors[axis] ? Math.sqrt(variance) : 0;
    const varianceError = variance * Math.sqrt(inverse[i * layout.size + i]);
    // Near zero the square root flattens: the error of s is then what makes s² one standard error.
    return { value, standardError: varianceError / (value + Math.sqrt(value * value + varianceError)) };
  });
}

/**
 * Where the iteration starts. Displacement covariances give friction, noise and localization error as if they were
 * constant, robustly at any noise; the differences estimate gives their course over space and the force, and is kept
 * within a factor of those constants.
 */

import { Matrix, solve } from 'ml-matrix';
import { DataError, unlessUnusable } from '../../errors.js';
import type { CoefficientField, ModelEvaluator } from '../../fields/CoefficientField.js';
import { createBasis } from '../../fields/createBasis.js';
import { createModelEvaluator } from '../../fields/evaluateModel.js';
import { meanErrorVariances } from '../../tracks/meanErrorVariances.js';
import { countPositions, type TrackSet } from '../../tracks/TrackSet.js';
import { estimateDifferences } from '../differences/estimateDifferences.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../Estimate.js';
import { estimateDisplacementCovariances } from '../../momenta/displacementCovariances.js';
import { fitDisplacementModel, type ModelKind } from '../../momenta/fitDisplacementModel.js';
import type { FieldSlot, LikelihoodLayout } from './layout.js';

const MOST_PLACES = 6000; // at which the start is read off
const START_FUNCTIONS = [10, 5, 4] as const; // per axis of a spline, by dimensions: the course in rough
const REACH = 4; // factor from the constant beyond which the course that differences give is cut off
const SMOOTHNESS = 1e-3; // penalty on the values read off, relative to their weight

/**
 * Start values of the whole parameter vector.
 *
 * @param floors  length d: smallest localization error variance the fit considers, length²
 */
export function findStart(
  tracks: TrackSet,
  plan: EstimationPlan,
  layout: LikelihoodLayout,
  floors: Float64Array,
): Float64Array {
  const parameters = new Float64Array(layout.size);
  const known = plan.start && plan.start.coefficients.length === layout.modelSize ? plan.start : null;
  const constants = findConstants(tracks, plan);
  const estimate = known ? null : tryDifferences(tracks, plan, constants);
  const d = layout.dimensions;
  const places = samplePlaces(tracks);
  const evaluator = estimate && createModelEvaluator(estimate.model);
  if (evaluator) setForce(parameters, layout.force, d, places, evaluator);
  if (layout.friction)
    setPositive(parameters, layout.friction, d, places, evaluator?.frictionInto, constants.friction);
  setPositive(parameters, layout.noise, d, places, evaluator?.noiseInto, constants.noise);
  if (known) parameters.set(known.coefficients);
  if (layout.errorOffset >= 0) {
    for (let axis = 0; axis < d; axis++) {
      const variance = constants.errorVariance[axis];
      parameters[layout.errorOffset + axis] = Math.log(Math.max(variance, 30 * floors[axis]));
    }
  }
  return parameters;
}

function tryDifferences(tracks: TrackSet, plan: EstimationPlan, constants: Constants): Estimate | null {
  // Runs too short for differences, or moments that tell nothing apart: the likelihood may still cope.
  return unlessUnusable(() =>
    estimateDifferences(tracks, {
      ...plan,
      localizationError: plan.localizationError ?? Array.from(constants.errorVariance, rootOf),
      force: coarsen(plan.force),
      friction: coarsen(plan.friction),
      noise: coarsen(plan.noise),
    }),
  );
}

/** The same field with no more functions than a start needs. */
function coarsen(field: FieldPlan): FieldPlan {
  const { basis } = field;
  if (basis?.kind !== 'spline') return { ...field, smoothing: 'light' };
  const most = START_FUNCTIONS[basis.counts.length - 1];
  const counts = basis.counts.map((count) => Math.min(count, most));
  return { ...field, basis: { ...basis, counts }, smoothing: 'light' };
}

const rootOf = (variance: number): number => Math.sqrt(Math.max(variance, 0));

interface Constants {
  /** Length d each: friction (1/time), noise (or diffusion), localization error variance (length²). */
  readonly friction: Float64Array;
  readonly noise: Float64Array;
  readonly errorVariance: Float64Array;
}

/** One number per axis from the displacement covariances. */
function findConstants(tracks: TrackSet, plan: EstimationPlan): Constants {
  const { dimensions: d, samplingInterval: interval } = tracks;
  const covariances = estimateDisplacementCovariances(tracks);
  const friction = new Float64Array(d);
  const noise = new Float64Array(d);
  const errorVariance = new Float64Array(d);
  const kinds: readonly ModelKind[] =
    plan.order === 'second' ? ['second-free', 'second-trapped'] : ['first-free', 'first-trapped'];
  const table = meanErrorVariances(tracks);
  let moving = false;
  for (let axis = 0; axis < d; axis++) {
    const given = plan.localizationError ? plan.localizationError[axis] ** 2 : (table?.[axis] ?? null);
    const fits = kinds.flatMap(
      (kind) => fitDisplacementModel(covariances, axis, kind, given, plan.exposure) ?? [],
    );
    fits.sort((a, b) => b.logLikelihood - a.logLikelihood);
    const variance = Math.max(covariances.covariances[axis][0], 0) || 0;
    if (variance > 0) moving = true;
    const model = fits[0]?.model;
    // Without a fit: half the displacement variance is motion, a third of a velocity is lost per frame.
    let rate = 0.3;
    let thermal = variance / 2;
    let diffusion = variance / 4;
    if (model && 'friction' in model) {
      rate = model.friction;
      thermal = model.velocityVariance;
    } else if (model) {
      diffusion = model.diffusion;
    }
    friction[axis] = Math.min(Math.max(rate, 1e-3), 5) / interval;
    noise[axis] =
      plan.order === 'second' ? (2 * friction[axis] * thermal) / (interval * interval) : diffusion / interval;
    errorVariance[axis] = fits[0]?.errorVariance ?? 0;
  }
  if (!moving) {
    throw new DataError(
      'no track ever moves, so there is nothing to estimate; check the columns and the tracking',
    );
  }
  const typical = Math.max(...noise);
  for (let axis = 0; axis < d; axis++) if (!(noise[axis] > 0)) noise[axis] = 1e-6 * typical;
  return { friction, noise, errorVariance };
}

/** Coordinates of at most `MOST_PLACES` recorded positions, evenly through the recording. */
function samplePlaces(tracks: TrackSet): Float64Array {
  const d = tracks.dimensions;
  const n = countPositions(tracks);
  const count = Math.min(n, MOST_PLACES);
  const places = new Float64Array(count * d);
  for (let i = 0; i < count; i++) {
    const row = Math.floor((i * n) / count);
    for (let axis = 0; axis < d; axis++) places[i * d + axis] = tracks.positions[row * d + axis];
  }
  return places;
}

function setForce(
  parameters: Float64Array,
  slot: FieldSlot,
  d: number,
  places: Float64Array,
  evaluator: ModelEvaluator,
): void {
  if (slot.basis < 0) return;
  const force = new Float64Array(d);
  const perAxis = Array.from({ length: d }, () => new Float64Array(places.length / d));
  for (let place = 0; place < places.length / d; place++) {
    evaluator.forceInto(places, place * d, force);
    for (let axis = 0; axis < d; axis++) perAxis[axis][place] = force[axis];
  }
  perAxis.forEach((values, axis) =>
    parameters.set(project(slot.field, d, places, values), slot.offset + axis * slot.functionCount),
  );
}

function setPositive(
  parameters: Float64Array,
  slot: FieldSlot,
  d: number,
  places: Float64Array,
  evaluate: ((places: ArrayLike<number>, offset: number, out: Float64Array) => void) | undefined,
  constants: Float64Array,
): void {
  if (slot.basis < 0) return;
  const matrix = new Float64Array(d * d);
  // Axes start unmixed: components off the diagonal stay zero.
  listDiagonal(slot, d).forEach((component, axis) => {
    const constant =
      slot.components === 1 ? constants.reduce((sum, value) => sum + value, 0) / d : constants[axis];
    const logarithms = new Float64Array(places.length / d).fill(Math.log(constant));
    if (evaluate) {
      for (let place = 0; place < logarithms.length; place++) {
        evaluate(places, place * d, matrix);
        const ratio = matrix[axis * d + axis] / constant;
        logarithms[place] += Math.log(Math.min(Math.max(ratio, 1 / REACH), REACH));
      }
    }
    const projected = project(slot.field, d, places, logarithms);
    parameters.set(projected, slot.offset + component * slot.functionCount);
  });
}

/** Component on the diagonal for each axis; one for all in the scalar form. */
function listDiagonal({ field, components }: FieldSlot, d: number): number[] {
  if (components === 1) return [0];
  return Array.from({ length: d }, (_, axis) => {
    if (field.form !== 'matrix') return axis;
    return field.name === 'friction' ? axis * (d + 1) : axis * d - (axis * (axis - 1)) / 2;
  });
}

/** Coefficients whose weighted sum comes closest to the values at the places, slightly smoothed. */
function project(
  field: CoefficientField,
  d: number,
  places: Float64Array,
  values: Float64Array,
): Float64Array {
  const basis = createBasis(field.basis, d);
  const k = basis.functionCount;
  const indices = new Int32Array(basis.support);
  const weights = new Float64Array(basis.support);
  const gram = Matrix.zeros(k, k);
  const right = Matrix.zeros(k, 1);
  for (let place = 0; place < values.length; place++) {
    const count = basis.evaluateInto(places, place * d, indices, weights);
    for (let i = 0; i < count; i++) {
      const row = indices[i];
      right.set(row, 0, right.get(row, 0) + weights[i] * values[place]);
      for (let j = 0; j < count; j++)
        gram.set(row, indices[j], gram.get(row, indices[j]) + weights[i] * weights[j]);
    }
  }
  const scale = gram.trace() / k;
  const roughness = basis.roughness();
  // A pull towards the mean keeps functions that no place reaches finite.
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const constant = basis.spec.kind === 'spline' || basis.spec.kind === 'constant';
  for (let i = 0; i < k; i++) {
    gram.set(i, i, gram.get(i, i) + 1e-6 * scale);
    if (constant) right.set(i, 0, right.get(i, 0) + 1e-6 * scale * mean);
    if (roughness)
      for (let j = 0; j < k; j++) gram.set(i, j, gram.get(i, j) + SMOOTHNESS * scale * roughness[i * k + j]);
  }
  return Float64Array.from(solve(gram, right).to1DArray());
}

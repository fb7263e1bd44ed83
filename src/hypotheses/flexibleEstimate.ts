/**
 * The flexible fit a statement is compared with: the tracks of the fit anew, with the coefficients in question given a
 * moderate spline that is hardly penalised, so that their smooth averages carry no smoothing bias, and with the
 * recording cut into short stretches as blocks. The other coefficients keep the study's shape, except that a finer spline
 * is brought down to the same moderate one: its details could not be told from those averages anyway.
 *
 * By likelihood, which makes the most of the data, whatever the fit's own estimator; by differences where the likelihood
 * does not reach (matrix forms, exposure).
 */

import type { FitResult } from '../documents/FitDocument.js';
import type { Blocks } from '../estimation/blocks.js';
import { estimateDifferences } from '../estimation/differences/estimateDifferences.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../estimation/Estimate.js';
import { estimateLikelihood } from '../estimation/likelihood/estimateLikelihood.js';
import { planEstimation } from '../estimation/planEstimation.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldForm } from '../fields/CoefficientField.js';
import { countPositions, type TrackSet } from '../tracks/TrackSet.js';
import { checkTrackLengths } from '../tracks/usableTracks.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';

/** The planned coefficients, by their names in the plan: `force` is the drift at first order, `noise` the diffusion. */
export type PlannedField = 'force' | 'friction' | 'noise';

export interface FlexiblePlan {
  /** The tracks that are long enough. */
  readonly tracks: TrackSet;
  readonly plan: EstimationPlan;
  /** Basis of the coefficients in question, over which modes are formed. */
  readonly basis: BasisSpec;
}

export interface FlexibleEstimate extends FlexiblePlan {
  readonly estimate: Estimate;
}

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

const SPLINES = [14, 6, 4] as const; // per axis, by dimensions: room for the modes that are looked at, and some more
const MOST_STRETCHES = 250; // degrees of freedom of the covariance; more hardly narrow an F law
const SHORTEST_STRETCH = 80; // positions: many times what a difference spans or a filter remembers
const POSITIONS_PER_FUNCTION = 60; // fewer and the regression gets ragged

/**
 * Estimates anew with the named coefficients flexible.
 *
 * @param tracks  the recording the fit was made from
 * @param frictionForm  replaces the fit's form of the friction
 * @throws DataError, NumericalError  as the estimators do
 */
export function estimateFlexibly(
  fit: FitResult,
  tracks: TrackSet,
  flexible: readonly PlannedField[],
  frictionForm?: FieldForm,
): FlexibleEstimate {
  const planned = planFlexibly(fit, tracks, flexible, frictionForm);
  const estimate = isCovered(planned.plan) ? estimateLikelihood : estimateDifferences;
  return { ...planned, estimate: estimate(planned.tracks, planned.plan) };
}

/** Whether the likelihood takes the plan. */
function isCovered({ friction, noise, exposure }: EstimationPlan): boolean {
  return friction.form !== 'matrix' && noise.form !== 'matrix' && exposure === 0;
}

/** What `estimateFlexibly` estimates. */
export function planFlexibly(
  fit: FitResult,
  tracks: TrackSet,
  flexible: readonly PlannedField[],
  frictionForm: FieldForm = fit.study.frictionForm,
): FlexiblePlan {
  const { order } = fit.model;
  const usable = checkTrackLengths(tracks, order).tracks;
  const study = { ...fit.study, frictionForm: frictionForm as typeof fit.study.frictionForm };
  const planned = planEstimation(usable, study, order, null, fit.visited);
  const basis = testBasis(fit.visited, usable);
  const loosen = (name: PlannedField): FieldPlan => {
    const field = planned[name];
    const isFine = field.basis?.kind === 'spline' && countFunctions(field.basis) >= countFunctions(basis);
    return flexible.includes(name) || isFine ? { ...field, basis, smoothing: 'light' } : field;
  };
  const plan: EstimationPlan = {
    ...planned,
    force: loosen('force'),
    friction: loosen('friction'),
    noise: loosen('noise'),
    blocks: cutStretches(usable, MOST_STRETCHES),
  };
  return { tracks: usable, plan, basis };
}

/**
 * Stretches of equal numbers of positions as blocks. They may be shorter than the memory of the motion, because what an
 * estimating equation adds up is new to its past: in a right model its terms are uncorrelated beyond the few frames a
 * difference spans or a filter remembers, however long velocities last.
 */
export function cutStretches(tracks: TrackSet, most: number): Blocks {
  const n = countPositions(tracks);
  const count = Math.max(1, Math.min(most, Math.floor(n / SHORTEST_STRETCH)));
  const ofPosition = Int32Array.from({ length: n }, (_, row) => Math.floor((row * count) / n));
  return { count, ofPosition, kind: 'stretches' };
}

function countFunctions(spline: SplineSpec): number {
  return spline.counts.reduce((product, count) => product * count, 1);
}

function testBasis(visited: VisitedRegion, tracks: TrackSet): SplineSpec {
  const { dimensions: d, periods } = tracks;
  const affordable = Math.floor((countPositions(tracks) / POSITIONS_PER_FUNCTION) ** (1 / d));
  const count = Math.max(4, Math.min(SPLINES[d - 1], affordable));
  return {
    kind: 'spline',
    counts: new Array<number>(d).fill(count),
    low: periods.map((period, axis) => (period > 0 ? 0 : visited.low[axis])),
    high: periods.map((period, axis) => (period > 0 ? period : visited.high[axis])),
    periods: [...periods],
  };
}

/** Rows evenly spaced through the recording: places in the measure of the time spent there, shape (m, d). */
export function pickOccupancyNodes(tracks: TrackSet, most: number): Float64Array {
  const { dimensions: d, positions } = tracks;
  const n = countPositions(tracks);
  const count = Math.min(n, most);
  const nodes = new Float64Array(count * d);
  for (let node = 0; node < count; node++) {
    const row = Math.floor(((node + 0.5) * n) / count);
    for (let axis = 0; axis < d; axis++) nodes[node * d + axis] = positions[row * d + axis];
  }
  return nodes;
}

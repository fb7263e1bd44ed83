/**
 * The flexible fit a statement is compared with: the tracks of the fit anew, with the coefficients in question given a
 * moderate spline that is hardly penalised, so that their smooth averages carry no smoothing bias, and with the
 * recording cut into short stretches as blocks. The other coefficients keep the study's shape, except that a finer spline
 * is brought down to the same moderate one: its details could not be told from those averages anyway.
 *
 * By likelihood, which makes the most of the data, whatever the fit's own estimator; by differences where the likelihood
 * takes long (matrix forms, exposure).
 */

import type { FitResult } from '../documents/FitDocument.js';
import type { Blocks } from '../estimation/blocks.js';
import { estimateDifferences } from '../estimation/differences/estimateDifferences.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../estimation/Estimate.js';
import { estimateLikelihood } from '../estimation/likelihood/estimateLikelihood.js';
import { planEstimation } from '../estimation/planEstimation.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldForm } from '../fields/CoefficientField.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';
import { countPositions, type TrackSet } from '../tracks/TrackSet.js';
import { checkTrackLengths } from '../tracks/usableTracks.js';

/** The planned coefficients, by their names in the plan: `force` is the drift at first order, `noise` the diffusion. */
export type PlannedField = 'force' | 'friction' | 'noise';

export interface FlexiblePlan {
  /** The tracks that are long enough. */
  readonly tracks: TrackSet;
  readonly plan: EstimationPlan;
  /** Basis of the coefficients in question, over which modes are formed. */
  readonly basis: SplineSpec;
}

export interface FlexibleEstimate extends FlexiblePlan {
  readonly estimate: Estimate;
}

/** How to estimate; `smooth`: as smooth as the data allow, for a model to simulate rather than to test. */
export type FlexibleSettings = Pick<EstimationPlan, 'onProgress' | 'pointOnly'> & {
  readonly smooth?: boolean;
};

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

const SPLINES = [14, 5, 4] as const; // per axis, by dimensions: room for the modes that are looked at, and some more
const MOST_STRETCHES = 250; // degrees of freedom of the covariance; more hardly narrow an F law
const SHORTEST_STRETCH = 80; // positions: many times what a difference spans or a filter remembers
const POSITIONS_PER_FUNCTION = 60; // fewer and the estimate gets ragged
const OUTERMOST_POSITIONS = 100; // on either side of an axis …
const OUTERMOST_SHARE = 0.01; // … but at most this share
const RELAXATIONS_PER_FUNCTION = 40; // the same for friction, which is learnt once per relaxation time and axis

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
  { smooth = false, ...settings }: FlexibleSettings = {},
): FlexibleEstimate {
  const planned = planFlexibly(fit, tracks, flexible, frictionForm);
  const { force, friction, noise } = planned.plan;
  const plan = {
    ...planned.plan,
    ...settings,
    ...(smooth ? { force: smoothed(force), friction: smoothed(friction), noise: smoothed(noise) } : {}),
  };
  const estimate = isQuick(plan) ? estimateLikelihood : estimateDifferences;
  return { ...planned, estimate: estimate(planned.tracks, plan) };
}

/** With a strength of smoothing from the data. */
function smoothed(field: FieldPlan): FieldPlan {
  return { ...field, smoothing: 'penalized' };
}

/** Whether the likelihood filters the plan axis by axis, which is quick. */
function isQuick({ friction, noise, exposure }: EstimationPlan): boolean {
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
  const { relaxationTime } = fit.survey;
  const basis = testBasis(usable, typeof relaxationTime === 'number' ? relaxationTime : null);
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

/**
 * Splines over the box that holds all but the outermost positions along each open axis: beyond, where single turning
 * points would decide, the coefficients are held at their edge.
 */
function testBasis(tracks: TrackSet, relaxationTime: number | null): SplineSpec {
  const { dimensions: d, periods, samplingInterval, positions } = tracks;
  const n = countPositions(tracks);
  const relaxations = relaxationTime === null ? Infinity : (n * d * samplingInterval) / relaxationTime;
  const functions = Math.min(n / POSITIONS_PER_FUNCTION, relaxations / RELAXATIONS_PER_FUNCTION);
  const count = Math.max(4, Math.min(SPLINES[d - 1], Math.floor(functions ** (1 / d))));
  const outside = Math.min(OUTERMOST_SHARE, OUTERMOST_POSITIONS / n);
  const box = periods.map((period, axis) => {
    if (period > 0) return [0, period];
    const along = Float64Array.from({ length: n }, (_, row) => positions[row * d + axis]).sort();
    return [quantileSorted(along, outside), quantileSorted(along, 1 - outside)];
  });
  return {
    kind: 'spline',
    counts: new Array<number>(d).fill(count),
    low: box.map(([low]) => low),
    high: box.map(([, high]) => high),
    periods: [...periods],
  };
}

/**
 * Rows evenly spaced through the recording, those outside the box of the splines left out: places in the measure of the
 * time spent there, shape (m, d).
 */
export function pickOccupancyNodes({ tracks, basis }: FlexiblePlan, most: number): Float64Array {
  const { dimensions: d, positions } = tracks;
  const n = countPositions(tracks);
  const count = Math.min(n, most);
  const nodes: number[] = [];
  for (let node = 0; node < count; node++) {
    const row = Math.floor(((node + 0.5) * n) / count);
    const place = positions.subarray(row * d, row * d + d);
    const isInside = place.every(
      (value, axis) => basis.periods[axis] > 0 || (value >= basis.low[axis] && value <= basis.high[axis]),
    );
    if (isInside) nodes.push(...place);
  }
  return Float64Array.from(nodes);
}

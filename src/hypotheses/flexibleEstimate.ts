/**
 * The flexible fit a statement is compared with: the fit's own estimator on the fit's own tracks and blocks, with the
 * coefficients in question given a moderate spline without roughness penalty, so that their smooth averages carry no
 * smoothing bias.
 */

import type { FitDocument } from '../documents/FitDocument.js';
import { chooseEstimator } from '../estimation/choose.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../estimation/Estimate.js';
import { planEstimation } from '../estimation/planEstimation.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldForm } from '../fields/CoefficientField.js';
import { countPositions, type TrackSet } from '../tracks/TrackSet.js';
import { checkTrackLengths } from '../tracks/usableTracks.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';

/** The planned coefficients, by their names in the plan: `force` is the drift at first order, `noise` the diffusion. */
export type PlannedField = 'force' | 'friction' | 'noise';

export interface FlexibleEstimate {
  readonly tracks: TrackSet;
  readonly plan: EstimationPlan;
  readonly estimate: Estimate;
  /** Basis of the coefficients in question, over which modes are formed. */
  readonly basis: BasisSpec;
}

const SPLINES = [14, 7, 4] as const; // per axis, by dimensions: room for the modes that are looked at, and some more
const POSITIONS_PER_FUNCTION = 60; // fewer and the unpenalised regression gets ragged

/**
 * Estimates anew with the named coefficients flexible.
 *
 * @param tracks  the recording the fit was made from
 * @param frictionForm  replaces the fit's form of the friction
 * @throws DataError, NumericalError  as the estimator does
 */
export function estimateFlexibly(
  fit: FitDocument,
  tracks: TrackSet,
  flexible: readonly PlannedField[],
  frictionForm: FieldForm = fit.study.frictionForm,
): FlexibleEstimate {
  const { order } = fit.model;
  const usable = checkTrackLengths(tracks, order).tracks;
  const { relaxationTime } = fit.survey;
  const memory = typeof relaxationTime === 'number' ? relaxationTime : null;
  const study = { ...fit.study, frictionForm: frictionForm as typeof fit.study.frictionForm };
  const planned = planEstimation(usable, study, order, memory, fit.visited);
  const basis = testBasis(fit.visited, usable);
  const free = (field: FieldPlan): FieldPlan => ({ ...field, basis, smoothing: 'light' });
  const plan: EstimationPlan = {
    ...planned,
    force: flexible.includes('force') ? free(planned.force) : planned.force,
    friction: flexible.includes('friction') ? free(planned.friction) : planned.friction,
    noise: flexible.includes('noise') ? free(planned.noise) : planned.noise,
  };
  return { tracks: usable, plan, estimate: chooseEstimator(fit.study.estimator)(usable, plan), basis };
}

function testBasis(visited: VisitedRegion, tracks: TrackSet): BasisSpec {
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

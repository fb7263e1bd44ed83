/** The forward half of the second-order likelihood: the Kalman filter over one track, written to the tape. */

import { pointErrorsOf } from './errorVariances.js';
import type { PathObserver } from './PathPass.js';
import { readCoefficients } from './readCoefficients.js';
import type { PassState } from './secondOrderState.js';
import {
  FORCE,
  FRICTION,
  FRICTION_SLOPE,
  growTape,
  NOISE,
  OWN,
  RECORD_SIZE,
  SLOPE,
  STEP,
  TRANSITION,
  type Tape,
  UPDATE_SIZE,
} from './tape.js';
import { transitionInto } from './transition.js';

const LONGEST_X = 0.5; // Γh of one substep: coefficients are frozen and force slopes summed as series over it
const LONGEST_PHASE = 0.5; // √|K| h of one substep
export const LONGEST_PATH = 0.7; // cells of the finest basis a substep may cross
export const MOST_SUBSTEPS = 64;

/**
 * Filters the rows `start` (included) to `end` (excluded).
 *
 * @returns their log-likelihood, the first two positions not counted
 */
export function filterTrack(
  state: PassState,
  start: number,
  end: number,
  observer: PathObserver | undefined,
): number {
  const { tracks, layout, tape, diffuse, cellWidths, place, filtered, errorVariance } = state;
  const { positions, times } = tracks;
  const pointErrors = pointErrorsOf(tracks, layout, state.setting);
  const d = layout.dimensions;
  const innovations = observer?.innovations;
  const variances = observer?.innovationVariances;
  let logLikelihood = 0;
  let node = 0;
  for (let axis = 0; axis < d; axis++) {
    const at = start * d + axis;
    filtered[axis * 5] = positions[at];
    filtered[axis * 5 + 1] = 0;
    tape.startErrorVariance[axis] = pointErrors ? pointErrors[at] * pointErrors[at] : errorVariance[axis];
    filtered[axis * 5 + 2] = tape.startErrorVariance[axis];
    filtered[axis * 5 + 3] = 0;
    filtered[axis * 5 + 4] = diffuse[axis];
    if (innovations) innovations[at] = NaN;
    if (variances) variances[at] = NaN;
  }
  // What the last step read decides how finely the next is divided: known before its position is.
  growTape(tape, 0, 0);
  for (let axis = 0; axis < d; axis++) place[axis] = filtered[axis * 5];
  readCoefficients(state, 0);
  let steepness = measureSteepness(tape, 0);

  for (let row = start + 1; row < end; row++) {
    const interval = times[row] - times[row - 1];
    let reach = 0;
    if (row > start + 1) {
      for (let axis = 0; axis < d; axis++)
        reach = Math.max(reach, Math.abs(filtered[axis * 5 + 1]) / cellWidths[axis]);
    }
    const substeps = Math.min(
      MOST_SUBSTEPS,
      Math.max(1, Math.ceil(interval * Math.max(steepness, reach / LONGEST_PATH) - 1e-9)),
    );
    const h = interval / substeps;
    growTape(tape, node + substeps, row - start);
    tape.firstNode[row - start] = node;
    // Arrays are looked up once a row: they change when the tape grows.
    const { records } = tape;
    const hasSlope = row > start + 1; // not yet with the diffuse velocity of a start, which would swamp it
    for (let sub = 0; sub < substeps; sub++, node++) {
      const lastFriction = records[(node > 0 ? node - 1 : 0) * d * RECORD_SIZE + FRICTION];
      const half = h / (2 + lastFriction * h * 0.5); // (1 − e^{−Γh/2})/Γ to second order
      for (let axis = 0; axis < d; axis++) place[axis] = filtered[axis * 5] + filtered[axis * 5 + 1] * half;
      readCoefficients(state, node);
      for (let axis = 0; axis < d; axis++) {
        const at = (node * d + axis) * RECORD_SIZE;
        const base = axis * 5;
        if (hasSlope && records[at + FRICTION_SLOPE] !== 0) addFrictionSlope(records, at, h, filtered, base);
        const slot = at + TRANSITION;
        transitionInto(records[at + FRICTION], records[at + SLOPE], h, records, slot);
        const q = filtered[base];
        const v = filtered[base + 1];
        const pqq = filtered[base + 2];
        const pqv = filtered[base + 3];
        const pvv = filtered[base + 4];
        records[at + STEP] = h;
        records[at + OWN] = v;
        records[at + OWN + 1] = pqv;
        records[at + OWN + 2] = pvv;
        const middle = place[axis];
        const f = records[at + FORCE];
        const n = records[at + NOISE];
        const aqq = records[slot];
        const aqv = records[slot + 1];
        const avq = records[slot + 2];
        const avv = records[slot + 3];
        const u = q - middle;
        filtered[base] = middle + aqq * u + aqv * v + f * records[slot + 4];
        filtered[base + 1] = avq * u + avv * v + f * records[slot + 5];
        filtered[base + 2] = aqq * aqq * pqq + 2 * aqq * aqv * pqv + aqv * aqv * pvv + n * records[slot + 6];
        filtered[base + 3] =
          aqq * avq * pqq + (aqq * avv + aqv * avq) * pqv + aqv * avv * pvv + n * records[slot + 7];
        filtered[base + 4] = avq * avq * pqq + 2 * avq * avv * pqv + avv * avv * pvv + n * records[slot + 8];
      }
    }
    steepness = measureSteepness(tape, node - 1);
    const counted = row > start + 1;
    for (let axis = 0; axis < d; axis++) {
      const at = row * d + axis;
      const base = axis * 5;
      const spread = pointErrors ? pointErrors[at] * pointErrors[at] : errorVariance[axis];
      const innovation = positions[at] - filtered[base];
      const variance = filtered[base + 2] + spread;
      const gainQ = filtered[base + 2] / variance;
      const gainV = filtered[base + 3] / variance;
      const slot = ((row - start) * d + axis) * UPDATE_SIZE;
      tape.update[slot] = innovation;
      tape.update[slot + 1] = variance;
      tape.update[slot + 2] = gainQ;
      tape.update[slot + 3] = gainV;
      tape.update[slot + 4] = filtered[base + 1];
      tape.update[slot + 5] = filtered[base + 4];
      if (counted) logLikelihood -= (Math.log(variance) + (innovation * innovation) / variance) / 2;
      if (innovations) innovations[at] = counted ? innovation / Math.sqrt(variance) : NaN;
      if (variances) variances[at] = counted ? variance : NaN;
      const left = spread / variance;
      filtered[base] += gainQ * innovation;
      filtered[base + 1] += gainV * innovation;
      filtered[base + 4] -= gainV * filtered[base + 3];
      filtered[base + 2] *= left;
      filtered[base + 3] *= left;
    }
  }
  tape.firstNode[end - start] = node;
  return logLikelihood;
}

/**
 * What a friction that varies over the uncertain path adds to force and slope of a step: the mean of −Γ(q)v is
 * −Γ(m)v̄ − Γ′ Cov(q, v), and its derivative along q is −Γ′v̄. The covariance is the mean over the step, to first
 * order in Γh.
 */
function addFrictionSlope(
  records: Float64Array,
  at: number,
  h: number,
  filtered: Float64Array,
  base: number,
): void {
  const slope = records[at + FRICTION_SLOPE];
  const x = records[at + FRICTION] * h;
  const covariance =
    filtered[base + 3] * (1 - x / 2) +
    ((filtered[base + 4] * h) / 2) * (1 - x) +
    ((records[at + NOISE] * h * h) / 6) * (1 - 0.75 * x);
  records[at + FORCE] -= slope * covariance;
  records[at + SLOPE] += slope * filtered[base + 1];
}

/** Steps per time that Γh and √|K| h ask for at a node. */
export function measureSteepness({ records, dimensions: d }: Tape, node: number): number {
  let steepness = 0;
  for (let axis = 0; axis < d; axis++) {
    const at = (node * d + axis) * RECORD_SIZE;
    steepness = Math.max(
      steepness,
      records[at + FRICTION] / LONGEST_X,
      Math.sqrt(Math.abs(records[at + SLOPE])) / LONGEST_PHASE,
    );
  }
  return Math.min(steepness, 1e300);
}

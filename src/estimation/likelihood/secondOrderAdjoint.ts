/** The backward half of the second-order likelihood: the adjoint of the filter, which gives scores and smoothed states. */

import type { PathObserver } from './PathPass.js';
import type { PassState } from './secondOrderState.js';
import { recallNode, spreadScores } from './readCoefficients.js';
import { FORCE, FRICTION, NOISE, OWN, RECORD_SIZE, STEP, TRANSITION, UPDATE_SIZE } from './tape.js';
import { transitionSlopesInto } from './transition.js';

/** The adjoint of the filter, from the last position of a track back to the first. */
export function smoothTrack(
  state: PassState,
  start: number,
  end: number,
  scores: Float64Array | null,
  observer: PathObserver | undefined,
): void {
  const { tracks, layout, setting, tape, adjoint, errorVariance } = state;
  const d = layout.dimensions;
  adjoint.fill(0);
  for (let row = end - 1; row > start; row--) {
    // States are smoothed by all positions; the likelihood leaves out those that start the filter.
    const counted = observer || row > start + 1 ? 1 : 0;
    const block = scores ? setting.blockOfPosition[row] * layout.size : 0;
    for (let axis = 0; axis < d; axis++) {
      const base = axis * 5;
      const slot = ((row - start) * d + axis) * UPDATE_SIZE;
      const innovation = tape.update[slot];
      const variance = tape.update[slot + 1];
      const gainQ = tape.update[slot + 2];
      const gainV = tape.update[slot + 3];
      const gq = adjoint[base];
      const gv = adjoint[base + 1];
      const bqq = adjoint[base + 2];
      const bqv = adjoint[base + 3];
      const bvv = adjoint[base + 4];
      const scaled = innovation / variance;
      const excess = counted * 0.5 * (scaled * scaled - 1 / variance);
      if (scores && layout.errorOffset >= 0) {
        const slope =
          excess -
          (gainQ * gq + gainV * gv) * scaled +
          gainQ * gainQ * bqq +
          2 * gainQ * gainV * bqv +
          gainV * gainV * bvv;
        scores[block + layout.errorOffset + axis] += slope * errorVariance[axis];
      }
      const left = 1 - gainQ;
      const pulled = left * gq - gainV * gv;
      const lower = bqv * left - bvv * gainV;
      adjoint[base + 2] = left * (left * bqq - gainV * bqv) - gainV * lower + pulled * scaled + excess;
      adjoint[base + 3] = lower + 0.5 * gv * scaled;
      adjoint[base] = pulled + counted * scaled;
      if (observer) observeState(state, row, axis, slot, observer);
    }
    stepBack(state, tape.firstNode[row - start], tape.firstNode[row - start + 1] - 1, scores, block);
  }
  if (scores && layout.errorOffset >= 0) {
    const block = setting.blockOfPosition[start] * layout.size;
    for (let axis = 0; axis < d; axis++)
      scores[block + layout.errorOffset + axis] += adjoint[axis * 5 + 2] * errorVariance[axis];
  }
  if (!observer) return;
  for (let axis = 0; axis < d; axis++) {
    const at = start * d + axis;
    const spread = tape.startErrorVariance[axis];
    writeSmoothed(
      observer,
      at,
      [tracks.positions[at], 0],
      [spread, 0, state.diffuse[axis]],
      adjoint,
      axis * 5,
    );
  }
}

/**
 * Carries the adjoint back over the steps `first` to `last` and adds their share to the scores of a block. Arrays are
 * looked up once, for this is the innermost loop.
 */
function stepBack(
  state: PassState,
  first: number,
  last: number,
  scores: Float64Array | null,
  block: number,
): void {
  const { tape, adjoint, slopes, targets } = state;
  const { records } = tape;
  const { values: forceScores, first: firstForce, step: forceStep } = targets.force;
  const { values: frictionScores, first: firstFriction, step: frictionStep } = targets.friction;
  const { values: noiseScores, first: firstNoise, step: noiseStep } = targets.noise;
  const d = tape.dimensions;
  for (let node = last; node >= first; node--) {
    for (let axis = 0; axis < d; axis++) {
      const at = (node * d + axis) * RECORD_SIZE;
      const base = axis * 5;
      const slot = at + TRANSITION;
      const aqq = records[slot];
      const aqv = records[slot + 1];
      const avq = records[slot + 2];
      const avv = records[slot + 3];
      const gq = adjoint[base];
      const gv = adjoint[base + 1];
      const bqq = adjoint[base + 2];
      const bqv = adjoint[base + 3];
      const bvv = adjoint[base + 4];
      if (scores !== null) {
        const friction = records[at + FRICTION];
        const noise = records[at + NOISE];
        transitionSlopesInto(friction, records[at + STEP], slopes);
        const v = records[at + OWN];
        const pqv = records[at + OWN + 1];
        const pvv = records[at + OWN + 2];
        const crossQ = aqq * pqv + aqv * pvv; // (A P)_qv and (A P)_vv
        const crossV = avq * pqv + avv * pvv;
        forceScores[firstForce + axis * forceStep] += gq * records[slot + 4] + gv * records[slot + 5];
        frictionScores[firstFriction + axis * frictionStep] +=
          friction *
          ((gq * v + 2 * (bqq * crossQ + bqv * crossV)) * slopes[0] +
            (gv * v + 2 * (bqv * crossQ + bvv * crossV)) * slopes[1] +
            records[at + FORCE] * (gq * slopes[2] + gv * slopes[0]) +
            noise * (bqq * slopes[3] + 2 * bqv * slopes[4] + bvv * slopes[5]));
        noiseScores[firstNoise + axis * noiseStep] +=
          noise * (bqq * records[slot + 6] + 2 * bqv * records[slot + 7] + bvv * records[slot + 8]);
      }
      adjoint[base] = aqq * gq + avq * gv;
      adjoint[base + 1] = aqv * gq + avv * gv;
      const lqq = bqq * aqq + bqv * avq;
      const lqv = bqq * aqv + bqv * avv;
      const lvq = bqv * aqq + bvv * avq;
      const lvv = bqv * aqv + bvv * avv;
      adjoint[base + 2] = aqq * lqq + avq * lvq;
      adjoint[base + 3] = aqq * lqv + avq * lvv;
      adjoint[base + 4] = aqv * lqv + avv * lvv;
    }
    if (scores === null) continue;
    recallNode(state, node);
    spreadScores(state, scores, block);
  }
}

/** Smoothed state at a row: prediction plus prediction covariance times the adjoint. */
function observeState(
  { layout, tracks, tape, adjoint }: PassState,
  row: number,
  axis: number,
  slot: number,
  observer: PathObserver,
): void {
  const at = row * layout.dimensions + axis;
  const base = axis * 5;
  const innovation = tape.update[slot];
  const variance = tape.update[slot + 1];
  const pqv = tape.update[slot + 3] * variance;
  const place = tracks.positions[at] - innovation;
  const pqq = tape.update[slot + 2] * variance;
  writeSmoothed(
    observer,
    at,
    [place, tape.update[slot + 4]],
    [pqq, pqv, tape.update[slot + 5]],
    adjoint,
    base,
  );
}

/** Mean and variance of (q, v) given everything, from a prediction and the adjoint there. */
function writeSmoothed(
  observer: PathObserver,
  at: number,
  mean: readonly [number, number],
  [pqq, pqv, pvv]: readonly [number, number, number],
  adjoint: Float64Array,
  base: number,
): void {
  const gq = adjoint[base];
  const gv = adjoint[base + 1];
  const nqq = gq * gq - 2 * adjoint[base + 2];
  const nqv = gq * gv - 2 * adjoint[base + 3];
  const nvv = gv * gv - 2 * adjoint[base + 4];
  if (observer.places) observer.places[at] = mean[0] + pqq * gq + pqv * gv;
  if (observer.placeVariances)
    observer.placeVariances[at] = pqq - (pqq * pqq * nqq + 2 * pqq * pqv * nqv + pqv * pqv * nvv);
  if (observer.velocities) observer.velocities[at] = mean[1] + pqv * gq + pvv * gv;
  if (observer.velocityVariances)
    observer.velocityVariances[at] = pvv - (pqv * pqv * nqq + 2 * pqv * pvv * nqv + pvv * pvv * nvv);
}

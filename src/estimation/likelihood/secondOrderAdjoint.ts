/** The backward half of the second-order likelihood: the adjoint of the filter, which gives scores and smoothed states. */

import type { PathObserver } from './PathPass.js';
import type { PassState } from './secondOrderState.js';
import { spreadScore } from './spreadScore.js';
import { UPDATE_SIZE } from './tape.js';
import { TRANSITION_SIZE, transitionSlopesInto } from './transition.js';

/** The adjoint of the filter, from the last position of a track back to the first. */
export function smoothTrack(
  state: PassState,
  start: number,
  end: number,
  scores: Float64Array | null,
  observer: PathObserver | undefined,
): void {
  const { tracks, layout, setting, tape, adjoint, slopes, errorVariance } = state;
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
    const first = tape.firstNode[row - start];
    for (let node = tape.firstNode[row - start + 1] - 1; node >= first; node--) {
      stepBack(state, node, scores, block, slopes);
    }
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

/** Carries the adjoint back over one step and adds the step's share to the score of its block. */
function stepBack(
  { layout, tape, adjoint }: PassState,
  node: number,
  scores: Float64Array | null,
  block: number,
  slopes: Float64Array,
): void {
  const { transition } = tape;
  const d = layout.dimensions;
  const h = tape.step[node];
  for (let axis = 0; axis < d; axis++) {
    const at = node * d + axis;
    const base = axis * 5;
    const friction = tape.friction[at];
    const noise = tape.noise[at];
    const force = tape.force[at];
    const slot = at * TRANSITION_SIZE;
    const aqq = transition[slot];
    const aqv = transition[slot + 1];
    const avq = transition[slot + 2];
    const avv = transition[slot + 3];
    const gq = adjoint[base];
    const gv = adjoint[base + 1];
    const bqq = adjoint[base + 2];
    const bqv = adjoint[base + 3];
    const bvv = adjoint[base + 4];
    if (scores) {
      transitionSlopesInto(friction, h, slopes);
      const v = tape.state[at * 5 + 1];
      const pqv = tape.state[at * 5 + 3];
      const pvv = tape.state[at * 5 + 4];
      const crossQ = aqq * pqv + aqv * pvv; // (A P)_qv and (A P)_vv
      const crossV = avq * pqv + avv * pvv;
      tape.forceScore[axis] = gq * transition[slot + 4] + gv * transition[slot + 5];
      tape.frictionScore[axis] =
        friction *
        ((gq * v + 2 * (bqq * crossQ + bqv * crossV)) * slopes[0] +
          (gv * v + 2 * (bqv * crossQ + bvv * crossV)) * slopes[1] +
          force * (gq * slopes[2] + gv * slopes[0]) +
          noise * (bqq * slopes[3] + 2 * bqv * slopes[4] + bvv * slopes[5]));
      tape.noiseScore[axis] =
        noise * (bqq * transition[slot + 6] + 2 * bqv * transition[slot + 7] + bvv * transition[slot + 8]);
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
  if (!scores) return;
  spreadScore(layout, tape, node, layout.force, tape.forceScore, scores, block);
  if (layout.friction) spreadScore(layout, tape, node, layout.friction, tape.frictionScore, scores, block);
  spreadScore(layout, tape, node, layout.noise, tape.noiseScore, scores, block);
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

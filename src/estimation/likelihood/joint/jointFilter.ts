/** The forward half of the joint likelihood: the Kalman filter over one track. */

import { pointErrorsOf } from '../errorVariances.js';
import { countSubsteps } from '../firstOrderPass.js';
import type { PathObserver } from '../PathPass.js';
import { LONGEST_PATH, measureSteepness } from '../secondOrderFilter.js';
import { FRICTION, growTape, RECORD_SIZE, SLOPE } from '../tape.js';
import { growState, type JointGroup, type JointState } from './jointState.js';
import { averageNode, readNode, writeSystem } from './jointSystem.js';

const MOST_SUBSTEPS = 256;
const SHUT = 1e-9; // of an interval: the shutter opens at once

/**
 * Filters the rows `start` (included) to `end` (excluded).
 *
 * @returns their log-likelihood without the positions that start the filter: the first at first order, two at second
 */
export function filterJointly(
  state: JointState,
  start: number,
  end: number,
  observer: PathObserver | undefined,
): number {
  const { tracks, tape, exposure, second } = state;
  const { times } = tracks;
  beginTrack(state, start);
  let logLikelihood = 0;
  let node = 0;
  for (let row = start; row < end; row++) {
    growState(state, node, row - start);
    growTape(tape, node, row - start);
    tape.firstNode[row - start] = node;
    const settled = row > start + Number(second);
    if (row === start) {
      if (exposure > 0) node = advance(state, node, exposure, exposure, false);
    } else {
      const interval = times[row] - times[row - 1];
      const open = Math.min(exposure, interval);
      if (interval - open > SHUT * interval) node = advance(state, node, interval - open, 0, settled);
      if (open > 0) node = advance(state, node, open, open, settled);
    }
    logLikelihood += takeIn(state, start, row, settled, observer);
  }
  tape.firstNode[end - start] = node;
  return logLikelihood;
}

/** States before the first position: at it, or anywhere before a window that ends with it. */
function beginTrack(state: JointState, start: number): void {
  const { tracks, layout, setting, groups, origin, exposure } = state;
  const d = layout.dimensions;
  const pointErrors = pointErrorsOf(tracks, layout, setting);
  for (let axis = 0; axis < d; axis++) {
    origin[axis] = tracks.positions[start * d + axis];
    state.tape.startErrorVariance[axis] = pointErrors
      ? pointErrors[start * d + axis] ** 2
      : state.errorVariance[axis];
  }
  for (const { axes, size, velocity, mean, covariance } of groups) {
    mean.fill(0);
    covariance.fill(0);
    axes.forEach((axis, i) => {
      covariance[i * size + i] =
        exposure > 0 ? state.diffusePlace[axis] : state.tape.startErrorVariance[axis];
      if (velocity >= 0) covariance[(velocity + i) * size + velocity + i] = state.diffuseVelocity[axis];
    });
  }
}

/** Moves all groups over a stretch of time; returns the next free node. */
function advance(
  state: JointState,
  firstNode: number,
  duration: number,
  window: number,
  settled: boolean,
): number {
  const { tape, second } = state;
  let node = firstNode;
  if (window > 0) for (const group of state.groups) openShutter(group);
  let substeps = 1;
  if (second && node > 0) {
    const pace = Math.max(measureSteepness(tape, node - 1), settled ? measurePace(state) : 0);
    substeps = Math.min(MOST_SUBSTEPS, Math.max(1, Math.ceil(duration * pace - 1e-9)));
  }
  for (let sub = 0; sub < substeps; sub++, node++) {
    growState(state, node, 0);
    growTape(tape, node, 0);
    let step = duration / substeps;
    findPlace(state, node, second ? step : 0);
    readNode(state, node, settled ? step : 0);
    if (!second && sub === 0) {
      substeps = countSubsteps(tape, node, state.cellWidths, duration);
      step = duration / substeps;
    }
    if (!second) averageNode(state, node, step);
    state.steps[node] = step;
    state.windows[node] = window;
    state.opens[node] = sub === 0 && window > 0 ? 1 : 0;
    state.rates[node] = measureRate(state, node) * step;
    for (const group of state.groups) {
      const { size, mean, covariance } = group;
      group.nodeMeans.set(mean, node * size);
      group.nodeCovariances.set(covariance, node * size * size);
      writeSystem(state, group, node);
      group.flow.advance(group.system, step, state.rates[node], mean, covariance);
    }
  }
  return node;
}

function openShutter({ size, blur, mean, covariance }: JointGroup): void {
  for (let z = blur; z < size; z++) {
    mean[z] = 0;
    for (let i = 0; i < size; i++) covariance[z * size + i] = covariance[i * size + z] = 0;
  }
}

/** Cells of the finest basis that are crossed per time, as substeps per time. */
function measurePace({ groups, cellWidths }: JointState): number {
  let pace = 0;
  for (const { axes, velocity, mean } of groups) {
    axes.forEach((axis, i) => {
      pace = Math.max(pace, Math.abs(mean[velocity + i]) / cellWidths[axis] / LONGEST_PATH);
    });
  }
  return pace;
}

/** Where to read the coefficients: half a step on at second order, where the filter is at first. */
function findPlace(state: JointState, node: number, step: number): void {
  const { groups, place, origin, tape, layout } = state;
  const lastFriction = tape.records[(node > 0 ? node - 1 : 0) * layout.dimensions * RECORD_SIZE + FRICTION];
  const half = step / (2 + lastFriction * step * 0.5); // (1 − e^{−Γh/2})/Γ to second order
  for (const { axes, velocity, mean } of groups) {
    axes.forEach((axis, i) => {
      place[axis] = origin[axis] + mean[i] + (velocity >= 0 ? mean[velocity + i] * half : 0);
    });
  }
}

/** The largest rate of the step's system. */
function measureRate({ tape, layout, second }: JointState, node: number): number {
  let rate = 0;
  const { records } = tape;
  for (let axis = 0; axis < layout.dimensions; axis++) {
    const at = (node * layout.dimensions + axis) * RECORD_SIZE;
    if (second) rate = Math.max(rate, 2 * records[at + FRICTION], 1.5 * Math.sqrt(records[at + SLOPE]));
    else rate = Math.max(rate, 2 * records[at + SLOPE]);
  }
  return rate;
}

/** Takes in the position of a row, one axis after the other. */
function takeIn(
  state: JointState,
  start: number,
  row: number,
  settled: boolean,
  observer: PathObserver | undefined,
): number {
  const { tracks, layout, setting, groups, origin, exposure, errorVariance } = state;
  const d = layout.dimensions;
  const pointErrors = pointErrorsOf(tracks, layout, setting);
  const starts = row === start && exposure === 0; // the state was set to this position
  let logLikelihood = 0;
  for (const group of groups) {
    const { axes, size, blur, mean, covariance, updates } = group;
    group.rowMeans.set(mean, (row - start) * size);
    group.rowCovariances.set(covariance, (row - start) * size * size);
    for (let i = 0; i < axes.length; i++) {
      const at = row * d + axes[i];
      const counted = settled && !starts;
      if (!counted && observer?.innovations) observer.innovations[at] = NaN;
      if (!counted && observer?.innovationVariances) observer.innovationVariances[at] = NaN;
      if (starts) continue;
      const seen = blur >= 0 ? blur + i : i;
      const spread = pointErrors ? pointErrors[at] ** 2 : errorVariance[axes[i]];
      const innovation = tracks.positions[at] - origin[axes[i]] - mean[seen];
      const variance = covariance[seen * size + seen] + spread;
      const slot = ((row - start) * axes.length + i) * (size + 2);
      updates[slot] = innovation;
      updates[slot + 1] = variance;
      for (let s = 0; s < size; s++) updates[slot + 2 + s] = covariance[s * size + seen];
      for (let s = 0; s < size; s++) {
        mean[s] += (updates[slot + 2 + s] * innovation) / variance;
        for (let c = 0; c < size; c++)
          covariance[s * size + c] -= (updates[slot + 2 + s] * updates[slot + 2 + c]) / variance;
      }
      if (!counted) continue;
      logLikelihood -= (Math.log(variance) + (innovation * innovation) / variance) / 2;
      if (observer?.innovations) observer.innovations[at] = innovation / Math.sqrt(variance);
      if (observer?.innovationVariances) observer.innovationVariances[at] = variance;
    }
  }
  return logLikelihood;
}

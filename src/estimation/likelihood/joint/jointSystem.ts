/** The linear system of one step: coefficients read at a node, and the same again for the way back. */

import { copySlopes, copySums, readNode as readBases } from '../readCoefficients.js';
import { FORCE, FRICTION, NOISE, RECORD_SIZE, SLOPE } from '../tape.js';
import type { JointGroup, JointState } from './jointState.js';

/**
 * Reads all coefficients at `place` onto the node.
 *
 * @param step  length of the step; the mean of −Γ(q)v over an uncertain path is corrected over it (0: is not)
 */
export function readNode(state: JointState, node: number, step: number): void {
  const { layout, tape, second, place, origin, matrix, sums, forceSlopes: forces } = state;
  const { frictionMatrix: friction, noiseMatrix: noise } = state;
  const { records } = tape;
  const d = layout.dimensions;
  const square = node * d * d;
  readBases(state, node);
  copySums(state.force, forces);
  for (let axis = 0; axis < d; axis++) {
    records[(node * d + axis) * RECORD_SIZE + FORCE] = forces[axis];
    state.nodeForces[node * d + axis] = forces[axis];
  }
  copySums(state.noise, sums);
  noise.read(sums, matrix);
  state.nodeNoises.set(matrix, square);
  if (friction) {
    copySums(state.friction, sums);
    friction.read(sums, matrix);
    state.nodeFrictions.set(matrix, square);
  }
  state.nodeStiffnesses.fill(0, square, square + d * d);
  for (const group of state.groups) {
    for (const axis of group.axes) readStiffness(state, node, group, axis);
    if (friction && second && step > 0) correctFriction(state, node, group, step);
  }
  for (let axis = 0; axis < d; axis++) {
    // Diagonal of the noise, sums of magnitudes of the others: what the length of steps goes by.
    const record = (node * d + axis) * RECORD_SIZE;
    records[record + NOISE] = state.nodeNoises[square + axis * d + axis];
    let rate = 0;
    let stiffness = 0;
    for (let other = 0; other < d; other++) {
      rate += Math.abs(state.nodeFrictions[square + axis * d + other]);
      stiffness += Math.abs(state.nodeStiffnesses[square + axis * d + other]);
      state.nodeForces[node * d + axis] +=
        state.nodeStiffnesses[square + axis * d + other] * (place[other] - origin[other]);
    }
    records[record + FRICTION] = second ? rate : 0;
    records[record + SLOPE] = stiffness;
  }
}

/** First order: takes drift and diffusion of a node for their means over the step. */
export function averageNode(state: JointState, node: number, step: number): void {
  const { average, layout, groups, spreads, matrix, forceSlopes: drift } = state;
  const { records } = state.tape;
  if (!average) return;
  const d = layout.dimensions;
  for (const { axes, size, covariance } of groups) {
    axes.forEach((axis, i) => {
      spreads[axis] = Math.sqrt(
        covariance[i * size + i] + state.nodeNoises[node * d * d + axis * (d + 1)] * step,
      );
    });
  }
  for (let i = 0; i < d * d; i++) matrix[i] = state.nodeNoises[node * d * d + i];
  for (let axis = 0; axis < d; axis++) drift[axis] = records[(node * d + axis) * RECORD_SIZE + FORCE];
  average.apply(state, spreads, drift, matrix);
  state.nodeNoises.set(matrix, node * d * d);
  for (let axis = 0; axis < d; axis++)
    state.nodeForces[node * d + axis] += drift[axis] - records[(node * d + axis) * RECORD_SIZE + FORCE];
}

/** Minus the derivative of the group's forces along an axis. */
function readStiffness(state: JointState, node: number, group: JointGroup, along: number): void {
  const { force, forceSlopes: slopes } = state;
  if (!force) return;
  const d = state.layout.dimensions;
  copySlopes(force, along, d, slopes);
  for (const axis of group.axes) state.nodeStiffnesses[node * d * d + axis * d + along] = -slopes[axis];
}

/**
 * What a friction that varies over the uncertain path adds: the mean of −Γ(q)v is −Γ(m)v̄ − Σ_l ∂_lΓ Cov(q_l, v), and its
 * derivative along q_l is −∂_lΓ v̄. The covariance is the mean over the step, to first order in Γh.
 */
function correctFriction(state: JointState, node: number, group: JointGroup, step: number): void {
  const { layout, friction: reading, frictionMatrix: friction, matrix, sums } = state;
  if (!friction || !reading || layout.bases[reading.slot.basis].spec.kind === 'constant') return;
  const d = layout.dimensions;
  const square = node * d * d;
  const { axes, size, velocity, mean, covariance } = group;
  const g = axes.length;
  let x = 0;
  for (const axis of axes) x += (state.nodeFrictions[square + axis * d + axis] * step) / g;
  for (let l = 0; l < g; l++) {
    copySlopes(reading, axes[l], d, sums);
    friction.differentiate(sums, matrix);
    for (let i = 0; i < g; i++) {
      for (let j = 0; j < g; j++) {
        const slope = matrix[axes[i] * d + axes[j]];
        if (slope === 0) continue;
        const shared =
          covariance[l * size + velocity + j] * (1 - x / 2) +
          ((covariance[(velocity + l) * size + velocity + j] * step) / 2) * (1 - x) +
          ((state.nodeNoises[square + axes[l] * d + axes[j]] * step * step) / 6) * (1 - 0.75 * x);
        state.nodeForces[node * d + axes[i]] -= slope * shared;
        state.nodeStiffnesses[square + axes[i] * d + axes[l]] += slope * mean[velocity + j];
      }
    }
  }
}

/** Writes the system of a group for the step of a node. */
export function writeSystem(state: JointState, group: JointGroup, node: number): void {
  const { axes, velocity, blur, system } = group;
  const d = state.layout.dimensions;
  const square = node * d * d;
  const g = axes.length;
  const { rows, columns, entries } = system;
  let count = 0;
  const put = (row: number, column: number, value: number): void => {
    rows[count] = row;
    columns[count] = column;
    entries[count++] = value;
  };
  if (velocity >= 0) {
    for (let i = 0; i < g; i++)
      for (let j = 0; j < g; j++)
        put(velocity + i, velocity + j, -state.nodeFrictions[square + axes[i] * d + axes[j]]);
    for (let i = 0; i < g; i++) put(i, velocity + i, 1);
  }
  for (let i = 0; i < g; i++) {
    for (let l = 0; l < g; l++) {
      const stiffness = state.nodeStiffnesses[square + axes[i] * d + axes[l]];
      if (stiffness !== 0) put(system.driven + i, l, -stiffness);
    }
  }
  const window = state.windows[node];
  if (window > 0) for (let i = 0; i < g; i++) put(blur + i, i, 1 / window);
  system.entryCount = count;
  const scale = velocity >= 0 ? 1 : 2; // the noise of a place is 2D
  for (let i = 0; i < g; i++) {
    system.offset[system.driven + i] = state.nodeForces[node * d + axes[i]];
    for (let j = 0; j < g; j++)
      system.noise[i * g + j] = scale * state.nodeNoises[square + axes[i] * d + axes[j]];
  }
}

/**
 * What the filter writes down while it runs over one track, for the adjoint to read backwards. A node is one (sub)step;
 * the arrays grow to the longest track and are used again for the next.
 */

import type { LikelihoodLayout } from './layout.js';
import { TRANSITION_SIZE } from './transition.js';

/** Numbers per row and axis in `update`. */
export const UPDATE_SIZE = 6;

export interface Tape {
  /** Nodes there is room for. */
  nodes: number;
  readonly dimensions: number;
  readonly supports: readonly number[];
  /** Per node: length of the step, time. */
  step: Float64Array;
  /** Per node and axis: mean and covariance of the filter before the step (q, v, qq, qv, vv). */
  state: Float64Array;
  force: Float64Array;
  /** Minus the derivative of the force along its own axis, 1/time². */
  slope: Float64Array;
  friction: Float64Array;
  /** Derivative of the friction along the axis, 1/(length·time); zero where the friction is uniform. */
  frictionSlope: Float64Array;
  noise: Float64Array;
  /** Per distinct basis and node: the functions that are not zero there. */
  readonly indices: Int32Array[];
  readonly values: Float64Array[];
  /** Per node and axis: the transition of the step, see `transitionInto`; second order only. */
  transition: Float64Array;
  /** Per row and axis: innovation, its variance, gains of q and v, predicted velocity and its variance. */
  update: Float64Array;
  /** Per row: first node of the step that leads to it; one more entry closes the last. */
  firstNode: Int32Array;
  /** Length d: localization error variance of the first position of the track, length². */
  readonly startErrorVariance: Float64Array;
  readonly scratchIndices: readonly Int32Array[];
  readonly scratchValues: readonly Float64Array[];
  readonly forceScore: Float64Array;
  readonly frictionScore: Float64Array;
  readonly noiseScore: Float64Array;
}

export function createTape(layout: LikelihoodLayout): Tape {
  const d = layout.dimensions;
  const supports = layout.bases.map((basis) => basis.support);
  const empty = new Float64Array(0);
  return {
    nodes: 0,
    dimensions: d,
    supports,
    step: empty,
    state: empty,
    force: empty,
    slope: empty,
    friction: empty,
    frictionSlope: empty,
    noise: empty,
    indices: supports.map(() => new Int32Array(0)),
    values: supports.map(() => empty),
    transition: empty,
    update: empty,
    firstNode: new Int32Array(0),
    startErrorVariance: new Float64Array(d),
    scratchIndices: supports.map((support) => new Int32Array(support)),
    scratchValues: supports.map((support) => new Float64Array(support)),
    forceScore: new Float64Array(d),
    frictionScore: new Float64Array(d),
    noiseScore: new Float64Array(d),
  };
}

/** Makes room for nodes and rows up to and including the numbers given; what is written stays. */
export function growTape(tape: Tape, node: number, row: number): void {
  const d = tape.dimensions;
  if (node >= tape.nodes) {
    const nodes = Math.max(256, 2 * tape.nodes, node + 1);
    tape.nodes = nodes;
    tape.step = extend(tape.step, nodes);
    tape.state = extend(tape.state, nodes * d * 5);
    tape.transition = extend(tape.transition, nodes * d * TRANSITION_SIZE);
    for (const name of ['force', 'slope', 'friction', 'frictionSlope', 'noise'] as const)
      tape[name] = extend(tape[name], nodes * d);
    tape.supports.forEach((support, b) => {
      const indices = new Int32Array(nodes * support);
      indices.set(tape.indices[b]);
      tape.indices[b] = indices;
      tape.values[b] = extend(tape.values[b], nodes * support);
    });
  }
  if ((row + 2) * d * UPDATE_SIZE > tape.update.length) {
    const rows = Math.max(256, 2 * (row + 2));
    tape.update = extend(tape.update, rows * d * UPDATE_SIZE);
    const firstNode = new Int32Array(rows + 1);
    firstNode.set(tape.firstNode);
    tape.firstNode = firstNode;
  }
}

function extend(values: Float64Array, length: number): Float64Array {
  const longer = new Float64Array(length);
  longer.set(values);
  return longer;
}

/**
 * What the filter writes down while it runs over one track, for the adjoint to read backwards. A node is one (sub)step;
 * the arrays grow to the longest track and are used again for the next.
 */

import type { LikelihoodLayout } from './layout.js';
import { TRANSITION_SIZE } from './transition.js';

/** Numbers per row and axis in `update`. */
export const UPDATE_SIZE = 6;

/** Slots of a record: all that belongs to a node and an axis lies together, which the innermost loops live on. */
export const FORCE = 0;
/** Minus the derivative of the force along its own axis, 1/time². */
export const SLOPE = 1;
export const FRICTION = 2;
/** Derivative of the friction along the axis, 1/(length·time); zero where the friction is uniform. */
export const FRICTION_SLOPE = 3;
export const NOISE = 4;
/** Length of the step, time. */
export const STEP = 5;
/** What a pass adds: at second order mean and covariances (v, qv, vv) of the filter before the step, then the transition. */
export const OWN = 6;
/** Second order: see `transitionInto`. */
export const TRANSITION = OWN + 3;
export const RECORD_SIZE = TRANSITION + TRANSITION_SIZE;

export interface Tape {
  /** Nodes there is room for. */
  nodes: number;
  readonly dimensions: number;
  /** Per node and axis, `RECORD_SIZE` numbers. */
  records: Float64Array;
  /** Per row and axis: innovation, its variance, gains of q and v, predicted velocity and its variance. */
  update: Float64Array;
  /** Per row: first node of the step that leads to it; one more entry closes the last. */
  firstNode: Int32Array;
  /** Length d: localization error variance of the first position of the track, length². */
  readonly startErrorVariance: Float64Array;
}

export function createTape(layout: LikelihoodLayout): Tape {
  const d = layout.dimensions;
  const empty = new Float64Array(0);
  return {
    nodes: 0,
    dimensions: d,
    records: empty,
    update: empty,
    firstNode: new Int32Array(0),
    startErrorVariance: new Float64Array(d),
  };
}

/** Makes room for nodes and rows up to and including the numbers given; what is written stays. */
export function growTape(tape: Tape, node: number, row: number): void {
  const d = tape.dimensions;
  if (node >= tape.nodes) {
    const nodes = Math.max(256, 2 * tape.nodes, node + 1);
    tape.nodes = nodes;
    tape.records = extend(tape.records, nodes * d * RECORD_SIZE);
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

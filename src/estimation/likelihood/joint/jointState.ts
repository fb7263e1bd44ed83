/**
 * What filter and adjoint of the joint pass share. Axes that friction or noise mix form one group, others a group each.
 * The states of a group are its places, at second order its velocities, and with an exposure the mean places since the
 * shutter opened; places count from the first position of the track.
 */

import type { TrackSet } from '../../../tracks/TrackSet.js';
import type { LikelihoodLayout } from '../layout.js';
import { createStepAverage, type StepAverage } from '../averageOverStep.js';
import { measureCells } from '../measureCells.js';
import { measureMotion } from '../measureMotion.js';
import type { PassSetting } from '../PathPass.js';
import { type CoefficientReader, createReader } from '../readCoefficients.js';
import { createMatrixField, type MatrixField } from '../matrixFields.js';
import {
  createMomentFlow,
  createSlopes,
  createSystem,
  type LinearSystem,
  type MomentFlow,
  type SystemSlopes,
} from './momentFlow.js';

export interface JointGroup {
  readonly axes: readonly number[];
  /** Number of states, and first state of the velocities (second order) and of the mean places (−1: snapshots). */
  readonly size: number;
  readonly velocity: number;
  readonly blur: number;
  readonly system: LinearSystem;
  readonly slopes: SystemSlopes;
  readonly flow: MomentFlow;
  readonly mean: Float64Array;
  readonly covariance: Float64Array;
  readonly meanSlope: Float64Array;
  readonly covarianceSlope: Float64Array;
  readonly gainSlopes: Float64Array;
  /** Per node: moments before the step; per row: moments before the position is taken in. */
  nodeMeans: Float64Array;
  nodeCovariances: Float64Array;
  rowMeans: Float64Array;
  rowCovariances: Float64Array;
  /** Per row and axis of the group: innovation, its variance, and its covariance with every state. */
  updates: Float64Array;
}

export interface JointState extends CoefficientReader {
  readonly tracks: TrackSet;
  readonly setting: PassSetting;
  readonly second: boolean;
  readonly groups: readonly JointGroup[];
  readonly frictionMatrix: MatrixField | null;
  readonly noiseMatrix: MatrixField;
  readonly cellWidths: Float64Array;
  readonly errorVariance: Float64Array;
  /** Length d: variances that say nothing of where a track starts (length²) and how fast (length²/time²). */
  readonly diffusePlace: Float64Array;
  readonly diffuseVelocity: Float64Array;
  /** Length d: first position of the track. */
  readonly origin: Float64Array;
  /** First order: means over a step; null where the coefficients do not bend, and at second order. */
  readonly average: StepAverage | null;
  readonly spreads: Float64Array;
  /** Exposure, time. */
  readonly exposure: number;
  /** Per node: friction, noise and minus the slopes of the force, shape (d, d) each; force less slopes × centre. */
  nodeFrictions: Float64Array;
  nodeNoises: Float64Array;
  nodeStiffnesses: Float64Array;
  nodeForces: Float64Array;
  /** Per node: length of the window the shutter is open for (0: shut), whether it has just opened, the rate. */
  windows: Float64Array;
  opens: Uint8Array;
  rates: Float64Array;
  /** Per node: length of the step, time. */
  steps: Float64Array;
  /** Scratch: a matrix, slopes along the entries of friction and noise, one number per component or axis. */
  readonly matrix: Float64Array;
  readonly frictionSlopes: Float64Array;
  readonly noiseSlopes: Float64Array;
  readonly sums: Float64Array;
  readonly forceSlopes: Float64Array;
}

const DIFFUSE = 1e4; // start variances relative to the mean squared step and secant velocity

export function createJointState(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
  exposure: number,
): JointState {
  const d = layout.dimensions;
  const second = layout.model.order === 'second';
  const mixed = layout.noise.field.form === 'matrix' || layout.friction?.field.form === 'matrix';
  const axes = Array.from({ length: d }, (_, axis) => axis);
  const empty = new Float64Array(0);
  const { steps, velocities } = measureMotion(tracks);
  return {
    ...createReader(layout, true),
    tracks,
    setting,
    second,
    groups: (mixed ? [axes] : axes.map((axis) => [axis])).map((own) =>
      createGroup(own, second, exposure > 0),
    ),
    frictionMatrix: layout.friction ? createMatrixField(layout.friction, d) : null,
    noiseMatrix: createMatrixField(layout.noise, d),
    cellWidths: measureCells(layout),
    errorVariance: new Float64Array(d),
    diffusePlace: steps.map((value) => DIFFUSE * value),
    diffuseVelocity: velocities.map((value) => DIFFUSE * value),
    origin: new Float64Array(d),
    average: second ? null : createStepAverage(layout, createMatrixField(layout.noise, d).read),
    spreads: new Float64Array(d),
    exposure: exposure * tracks.samplingInterval,
    nodeFrictions: empty,
    nodeNoises: empty,
    nodeStiffnesses: empty,
    nodeForces: empty,
    windows: empty,
    opens: new Uint8Array(0),
    rates: empty,
    steps: empty,
    matrix: new Float64Array(d * d),
    frictionSlopes: new Float64Array(d * d),
    noiseSlopes: new Float64Array(d * d),
    forceSlopes: new Float64Array(d),
    sums: new Float64Array(Math.max(layout.noise.components, layout.friction?.components ?? 0)),
  };
}

function createGroup(axes: readonly number[], second: boolean, blurred: boolean): JointGroup {
  const g = axes.length;
  const size = g * (1 + Number(second) + Number(blurred));
  const system = createSystem(size, second ? g : 0, g, second ? g * g : 0);
  const empty = new Float64Array(0);
  return {
    axes,
    size,
    velocity: second ? g : -1,
    blur: blurred ? size - g : -1,
    system,
    slopes: createSlopes(system),
    flow: createMomentFlow(size),
    mean: new Float64Array(size),
    covariance: new Float64Array(size * size),
    meanSlope: new Float64Array(size),
    covarianceSlope: new Float64Array(size * size),
    gainSlopes: new Float64Array(size),
    nodeMeans: empty,
    nodeCovariances: empty,
    rowMeans: empty,
    rowCovariances: empty,
    updates: empty,
  };
}

/** Makes room for nodes and rows up to and including the numbers given; what is written stays. */
export function growState(state: JointState, node: number, row: number): void {
  const d = state.layout.dimensions;
  if (node >= state.windows.length) {
    const nodes = Math.max(256, 2 * node);
    state.nodeFrictions = extend(state.nodeFrictions, nodes * d * d);
    state.nodeNoises = extend(state.nodeNoises, nodes * d * d);
    state.nodeStiffnesses = extend(state.nodeStiffnesses, nodes * d * d);
    state.nodeForces = extend(state.nodeForces, nodes * d);
    state.windows = extend(state.windows, nodes);
    state.rates = extend(state.rates, nodes);
    state.steps = extend(state.steps, nodes);
    const opens = new Uint8Array(nodes);
    opens.set(state.opens);
    state.opens = opens;
    for (const group of state.groups) {
      group.nodeMeans = extend(group.nodeMeans, nodes * group.size);
      group.nodeCovariances = extend(group.nodeCovariances, nodes * group.size * group.size);
    }
  }
  const first = state.groups[0];
  if ((row + 1) * first.size > first.rowMeans.length) {
    const rows = Math.max(256, 2 * (row + 1));
    for (const group of state.groups) {
      group.rowMeans = extend(group.rowMeans, rows * group.size);
      group.rowCovariances = extend(group.rowCovariances, rows * group.size * group.size);
      group.updates = extend(group.updates, rows * group.axes.length * (group.size + 2));
    }
  }
}

function extend(values: Float64Array, length: number): Float64Array<ArrayBuffer> {
  const longer = new Float64Array(length);
  longer.set(values);
  return longer;
}

/** The backward half of the joint likelihood: the adjoint of the filter, which gives scores and smoothed states. */

import type { PathObserver } from '../PathPass.js';
import { type FieldReading, recallNode, spreadScores, weighComponents } from '../readCoefficients.js';
import type { JointGroup, JointState } from './jointState.js';
import { writeSystem } from './jointSystem.js';

/** The adjoint of the filter, from the last position of a track back to the first. */
export function smoothJointly(
  state: JointState,
  parameters: Float64Array,
  start: number,
  end: number,
  scores: Float64Array | null,
  observer: PathObserver | undefined,
): void {
  const { layout, setting, tape, groups, second, exposure } = state;
  for (const group of groups) {
    group.meanSlope.fill(0);
    group.covarianceSlope.fill(0);
  }
  for (let row = end - 1; row >= start; row--) {
    const block = scores ? setting.blockOfPosition[row] * layout.size : 0;
    // States are smoothed by all positions; the likelihood leaves out those that start the filter.
    const counted = observer !== undefined || row > start + Number(second);
    if (row > start || exposure > 0) {
      for (const group of groups)
        for (let i = group.axes.length - 1; i >= 0; i--)
          takeOut(state, group, row - start, i, counted, scores, block);
    } else if (scores && layout.errorOffset >= 0) {
      addStartScores(state, scores, block);
    }
    if (observer) for (const group of groups) observe(state, group, start, row, observer);
    for (let node = tape.firstNode[row - start + 1] - 1; node >= tape.firstNode[row - start]; node--)
      stepBack(state, parameters, node, scores, block);
  }
}

/** Back over the position of one axis. */
function takeOut(
  { layout, errorVariance }: JointState,
  { axes, size, blur, updates, meanSlope, covarianceSlope, gainSlopes }: JointGroup,
  row: number,
  i: number,
  counted: boolean,
  scores: Float64Array | null,
  block: number,
): void {
  const seen = blur >= 0 ? blur + i : i;
  const slot = (row * axes.length + i) * (size + 2);
  const innovation = updates[slot];
  const variance = updates[slot + 1];
  const gains = slot + 2; // covariances of the states with what is seen
  const scaled = innovation / variance;
  let pull = 0;
  for (let s = 0; s < size; s++) pull += meanSlope[s] * updates[gains + s];
  let form = 0;
  for (let s = 0; s < size; s++) {
    let sum = 0;
    for (let c = 0; c < size; c++) sum += covarianceSlope[s * size + c] * updates[gains + c];
    form += updates[gains + s] * sum;
    gainSlopes[s] = meanSlope[s] * scaled - (2 * sum) / variance;
  }
  const own = counted ? (scaled * scaled - 1 / variance) / 2 : 0;
  const varianceSlope = (-pull * scaled) / variance + form / (variance * variance) + own;
  meanSlope[seen] += (counted ? scaled : 0) - pull / variance;
  for (let s = 0; s < size; s++) {
    covarianceSlope[s * size + seen] += gainSlopes[s] / 2;
    covarianceSlope[seen * size + s] += gainSlopes[s] / 2;
  }
  covarianceSlope[seen * size + seen] += varianceSlope;
  if (scores && layout.errorOffset >= 0)
    scores[block + layout.errorOffset + axes[i]] += varianceSlope * errorVariance[axes[i]];
}

/** The error of the position that a track starts from is the variance of its first state. */
function addStartScores(
  { layout, groups, errorVariance }: JointState,
  scores: Float64Array,
  block: number,
): void {
  for (const { axes, size, covarianceSlope } of groups) {
    axes.forEach((axis, i) => {
      scores[block + layout.errorOffset + axis] += covarianceSlope[i * size + i] * errorVariance[axis];
    });
  }
}

/** Carries the adjoint back over one step and adds the step's share to the score of its block. */
function stepBack(
  state: JointState,
  parameters: Float64Array,
  node: number,
  scores: Float64Array | null,
  block: number,
): void {
  const { layout, groups, second, frictionSlopes, noiseSlopes, matrix, sums } = state;
  const { force } = state.targets;
  const { frictionMatrix: friction, noiseMatrix: noise } = state;
  const d = layout.dimensions;
  frictionSlopes.fill(0);
  noiseSlopes.fill(0);
  for (const group of groups) {
    const { axes, size, mean, covariance, system, slopes } = group;
    for (let i = 0; i < size; i++) mean[i] = group.nodeMeans[node * size + i];
    for (let i = 0; i < size * size; i++) covariance[i] = group.nodeCovariances[node * size * size + i];
    writeSystem(state, group, node);
    group.flow.retreat(
      system,
      state.steps[node],
      state.rates[node],
      mean,
      covariance,
      group.meanSlope,
      group.covarianceSlope,
      scores ? slopes : null,
    );
    if (state.opens[node]) closeShutter(group);
    if (!scores) continue;
    const g = axes.length;
    const scale = second ? 1 : 2;
    for (let i = 0; i < g; i++) {
      force.values[force.first + axes[i]] += slopes.offset[system.driven + i];
      for (let j = 0; j < g; j++) {
        if (second) frictionSlopes[axes[i] * d + axes[j]] = -slopes.entries[i * g + j];
        noiseSlopes[axes[i] * d + axes[j]] = scale * slopes.noise[i * g + j];
      }
    }
  }
  if (!scores) return;
  // The spectral decompositions of the node again.
  recallNode(state, node);
  weighRecalled(parameters, state.noise, sums);
  noise.read(sums, matrix);
  noise.score(noiseSlopes, sums);
  addComponentScores(state.noise, sums);
  if (friction && state.friction) {
    weighRecalled(parameters, state.friction, sums);
    friction.read(sums, matrix);
    friction.score(frictionSlopes, sums);
    addComponentScores(state.friction, sums);
  }
  spreadScores(state, scores, block);
}

function addComponentScores({ slot, reader, first }: FieldReading, components: Float64Array): void {
  for (let component = 0; component < slot.components; component++)
    reader.scores[first + component] += components[component];
}

/** The weighted sums of a field's components at the node recalled. */
function weighRecalled(parameters: Float64Array, { slot, reader }: FieldReading, out: Float64Array): void {
  weighComponents(parameters, slot, reader.indices, reader.weights, 0, reader.indices.length, out);
}

function closeShutter({ size, blur, meanSlope, covarianceSlope }: JointGroup): void {
  for (let z = blur; z < size; z++) {
    meanSlope[z] = 0;
    for (let i = 0; i < size; i++) covarianceSlope[z * size + i] = covarianceSlope[i * size + z] = 0;
  }
}

/** Smoothed states at a row: prediction plus prediction covariance times the adjoint. */
function observe(
  { layout, origin }: JointState,
  group: JointGroup,
  start: number,
  row: number,
  observer: PathObserver,
): void {
  const { axes, size, velocity, rowMeans, rowCovariances, meanSlope, covarianceSlope } = group;
  const base = (row - start) * size * size;
  const smooth = (s: number): { mean: number; variance: number } => {
    let mean = rowMeans[(row - start) * size + s];
    let variance = rowCovariances[base + s * size + s];
    for (let i = 0; i < size; i++) {
      const left = rowCovariances[base + s * size + i];
      mean += left * meanSlope[i];
      for (let j = 0; j < size; j++) {
        const curvature = meanSlope[i] * meanSlope[j] - 2 * covarianceSlope[i * size + j];
        variance -= left * curvature * rowCovariances[base + s * size + j];
      }
    }
    return { mean, variance };
  };
  axes.forEach((axis, i) => {
    const at = row * layout.dimensions + axis;
    const place = smooth(i);
    if (observer.places) observer.places[at] = origin[axis] + place.mean;
    if (observer.placeVariances) observer.placeVariances[at] = place.variance;
    if (velocity < 0) return;
    const speed = smooth(velocity + i);
    if (observer.velocities) observer.velocities[at] = speed.mean;
    if (observer.velocityVariances) observer.velocityVariances[at] = speed.variance;
  });
}

/**
 * The likelihood pass at first order, axis by axis: a Kalman filter of the position, with drift, its slope and diffusion
 * read around where the filter is before each step, and its adjoint for the score. Reading them there and not halfway
 * keeps the Itô reading, and the innovations a martingale difference.
 *
 * Over a step of length h, with drift μ − κ(q − m) about the filter's mean m, the transition is that of an
 * Ornstein–Uhlenbeck position. The first position of a track starts the filter and is not counted.
 *
 * Source  as for `secondOrderPass`; transition: Uhlenbeck & Ornstein, Phys. Rev. 36 (1930) 823.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import { pointErrorsOf } from './errorVariances.js';
import { createStepAverage, type StepAverage } from './averageOverStep.js';
import type { LikelihoodLayout } from './layout.js';
import { createMatrixField } from './matrixFields.js';
import { measureCells } from './measureCells.js';
import type { PassSetting, PathObserver, PathPass } from './PathPass.js';
import { passOverTracks } from './passOverTracks.js';
import {
  type CoefficientReader,
  createReader,
  prepareReader,
  readCoefficients,
  recallNode,
  spreadScores,
} from './readCoefficients.js';
import { FORCE, growTape, NOISE, OWN, RECORD_SIZE, SLOPE, type Tape, UPDATE_SIZE } from './tape.js';

const DECAY = OWN;
/** Displacement per unit of drift, variance per unit of diffusion. */
const PER_DRIFT = OWN + 1;
const PER_DIFFUSION = OWN + 2;

const LONGEST_RELAXATION = 0.5; // |κ| h of one substep
const LONGEST_PATH = 0.5; // cells of the finest basis a substep may drift
const WIDEST_SPREAD = 1; // cells it may diffuse: coefficients are averaged over the spread
const MOST_SUBSTEPS = 64;

/** Prepares the pass; it keeps scratch space of its own. */
export function createFirstOrderPass(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
): PathPass {
  const d = layout.dimensions;
  const state: PassState = {
    ...createReader(layout),
    tracks,
    setting,
    cellWidths: measureCells(layout),
    mean: new Float64Array(d),
    variance: new Float64Array(d),
    adjointMean: new Float64Array(d),
    adjointVariance: new Float64Array(d),
    errorVariance: new Float64Array(d),
    average: createStepAverage(layout, createMatrixField(layout.noise, d).read),
    spreads: new Float64Array(d),
    drift: new Float64Array(d),
    diffusion: new Float64Array(d * d),
  };
  return passOverTracks(tracks, layout, setting, {
    fewest: 2,
    errorVariance: state.errorVariance,
    prepare: (parameters) => prepareReader(state, parameters),
    filter: (_, start, end, observer) => filterTrack(state, start, end, observer),
    smooth: (_, start, end, scores, observer) => smoothTrack(state, start, end, scores, observer),
  });
}

interface PassState extends CoefficientReader {
  readonly tracks: TrackSet;
  readonly setting: PassSetting;
  readonly cellWidths: Float64Array;
  /** Length d: of the filter. */
  readonly mean: Float64Array;
  readonly variance: Float64Array;
  /** Length d: derivatives of the log-likelihood along them. */
  readonly adjointMean: Float64Array;
  readonly adjointVariance: Float64Array;
  readonly errorVariance: Float64Array;
  /** Null where the coefficients do not bend. */
  readonly average: StepAverage | null;
  readonly spreads: Float64Array;
  readonly drift: Float64Array;
  readonly diffusion: Float64Array;
}

function filterTrack(
  state: PassState,
  start: number,
  end: number,
  observer: PathObserver | undefined,
): number {
  const { tracks, layout, setting, tape, mean, variance, place, errorVariance, cellWidths } = state;
  const { positions, times } = tracks;
  const pointErrors = pointErrorsOf(tracks, layout, setting);
  const d = layout.dimensions;
  let logLikelihood = 0;
  let node = 0;
  growTape(tape, 0, 0);
  for (let axis = 0; axis < d; axis++) {
    const at = start * d + axis;
    mean[axis] = positions[at];
    place[axis] = mean[axis];
    tape.startErrorVariance[axis] = pointErrors ? pointErrors[at] ** 2 : errorVariance[axis];
    variance[axis] = tape.startErrorVariance[axis];
    if (observer?.innovations) observer.innovations[at] = NaN;
    if (observer?.innovationVariances) observer.innovationVariances[at] = NaN;
  }
  for (let row = start + 1; row < end; row++) {
    const interval = times[row] - times[row - 1];
    growTape(tape, node, row - start);
    tape.firstNode[row - start] = node;
    place.set(mean);
    readCoefficients(state, node);
    const substeps = countSubsteps(tape, node, cellWidths, interval);
    const h = interval / substeps;
    for (let sub = 0; sub < substeps; sub++, node++) {
      growTape(tape, node, row - start);
      if (sub > 0) {
        place.set(mean);
        readCoefficients(state, node);
      }
      if (state.average) averageNode(state, state.average, node, h);
      for (let axis = 0; axis < d; axis++) {
        const { records } = tape;
        const at = (node * d + axis) * RECORD_SIZE;
        const x = records[at + SLOPE] * h;
        const decay = Math.exp(-x);
        const perDrift = h * lossRate(x);
        const perDiffusion = 2 * h * lossRate(2 * x);
        records[at + DECAY] = decay;
        records[at + PER_DRIFT] = perDrift;
        records[at + PER_DIFFUSION] = perDiffusion;
        mean[axis] += records[at + FORCE] * perDrift;
        variance[axis] = decay * decay * variance[axis] + records[at + NOISE] * perDiffusion;
      }
    }
    for (let axis = 0; axis < d; axis++) {
      const at = row * d + axis;
      const spread = pointErrors ? pointErrors[at] ** 2 : errorVariance[axis];
      const innovation = positions[at] - mean[axis];
      const total = variance[axis] + spread;
      const gain = variance[axis] / total;
      const slot = ((row - start) * d + axis) * UPDATE_SIZE;
      tape.update[slot] = innovation;
      tape.update[slot + 1] = total;
      tape.update[slot + 2] = gain;
      logLikelihood -= (Math.log(total) + (innovation * innovation) / total) / 2;
      if (observer?.innovations) observer.innovations[at] = innovation / Math.sqrt(total);
      if (observer?.innovationVariances) observer.innovationVariances[at] = total;
      mean[axis] += gain * innovation;
      variance[axis] *= spread / total;
    }
  }
  tape.firstNode[end - start] = node;
  return logLikelihood;
}

/** Takes drift and diffusion of a node for their means over the step. */
function averageNode(state: PassState, average: StepAverage, node: number, h: number): void {
  const { tape, variance, spreads, drift, diffusion } = state;
  const d = variance.length;
  const { records } = tape;
  for (let axis = 0; axis < d; axis++) {
    const at = (node * d + axis) * RECORD_SIZE;
    spreads[axis] = Math.sqrt(variance[axis] + records[at + NOISE] * h);
    drift[axis] = records[at + FORCE];
    diffusion[axis * d + axis] = records[at + NOISE];
  }
  average.apply(state, spreads, drift, diffusion);
  for (let axis = 0; axis < d; axis++) {
    const at = (node * d + axis) * RECORD_SIZE;
    records[at + FORCE] = drift[axis];
    records[at + NOISE] = diffusion[axis * d + axis];
  }
}

/** (1 − e⁻ˣ)/x. */
function lossRate(x: number): number {
  if (x < 1e-3 && x > -1e-3) return 1 - (x / 2) * (1 - x / 3);
  return -Math.expm1(-x) / x;
}

/** Steps to divide an interval into, from what was read at its first node. */
export function countSubsteps(
  { records }: Tape,
  node: number,
  cellWidths: Float64Array,
  interval: number,
): number {
  let most = 1;
  for (let axis = 0; axis < cellWidths.length; axis++) {
    const at = (node * cellWidths.length + axis) * RECORD_SIZE;
    const path = (Math.abs(records[at + FORCE]) * interval) / cellWidths[axis];
    const spread = Math.sqrt(2 * records[at + NOISE] * interval) / cellWidths[axis];
    most = Math.max(
      most,
      path / LONGEST_PATH,
      (spread / WIDEST_SPREAD) ** 2,
      (Math.abs(records[at + SLOPE]) * interval) / LONGEST_RELAXATION,
    );
  }
  return Math.min(MOST_SUBSTEPS, Math.ceil(most - 1e-9));
}

/** The adjoint of the filter, from the last position of a track back to the first. */
function smoothTrack(
  state: PassState,
  start: number,
  end: number,
  scores: Float64Array | null,
  observer: PathObserver | undefined,
): void {
  const { tracks, layout, setting, tape, adjointMean, adjointVariance, errorVariance } = state;
  const { force, noise } = state.targets;
  const { records } = tape;
  const d = layout.dimensions;
  adjointMean.fill(0);
  adjointVariance.fill(0);
  for (let row = end - 1; row > start; row--) {
    const block = scores ? setting.blockOfPosition[row] * layout.size : 0;
    for (let axis = 0; axis < d; axis++) {
      const slot = ((row - start) * d + axis) * UPDATE_SIZE;
      const gain = tape.update[slot + 2];
      const total = tape.update[slot + 1];
      const scaled = tape.update[slot] / total;
      const excess = (scaled * scaled - 1 / total) / 2;
      const g = adjointMean[axis];
      const b = adjointVariance[axis];
      if (scores && layout.errorOffset >= 0) {
        const slope = excess - gain * g * scaled + gain * gain * b;
        scores[block + layout.errorOffset + axis] += slope * errorVariance[axis];
      }
      const pulled = (1 - gain) * g;
      adjointVariance[axis] = (1 - gain) * (1 - gain) * b + pulled * scaled + excess;
      adjointMean[axis] = pulled + scaled;
      const at = row * d + axis;
      if (observer) {
        writePlace(
          observer,
          at,
          tracks.positions[at] - tape.update[slot],
          gain * total,
          adjointMean[axis],
          adjointVariance[axis],
        );
      }
    }
    for (let node = tape.firstNode[row - start + 1] - 1; node >= tape.firstNode[row - start]; node--) {
      for (let axis = 0; axis < d; axis++) {
        const at = (node * d + axis) * RECORD_SIZE;
        const decay = records[at + DECAY];
        if (scores) {
          force.values[force.first + axis * force.step] += adjointMean[axis] * records[at + PER_DRIFT];
          noise.values[noise.first + axis * noise.step] +=
            adjointVariance[axis] * records[at + PER_DIFFUSION] * records[at + NOISE];
        }
        adjointMean[axis] *= decay;
        adjointVariance[axis] *= decay * decay;
      }
      if (!scores) continue;
      recallNode(state, node);
      spreadScores(state, scores, block);
    }
  }
  for (let axis = 0; axis < d; axis++) {
    const at = start * d + axis;
    if (scores && layout.errorOffset >= 0) {
      const block = setting.blockOfPosition[start] * layout.size;
      scores[block + layout.errorOffset + axis] += adjointVariance[axis] * errorVariance[axis];
    }
    if (observer) {
      const spread = tape.startErrorVariance[axis];
      writePlace(observer, at, tracks.positions[at], spread, adjointMean[axis], adjointVariance[axis]);
    }
  }
}

/** Mean and variance of the position given everything, from a prediction and the adjoint there. */
function writePlace(
  observer: PathObserver,
  at: number,
  mean: number,
  variance: number,
  slope: number,
  curvature: number,
): void {
  if (observer.places) observer.places[at] = mean + variance * slope;
  if (observer.placeVariances)
    observer.placeVariances[at] = variance - variance * variance * (slope * slope - 2 * curvature);
}

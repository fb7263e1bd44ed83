/**
 * Drift common to all tracks: a sliding stage or a breathing sample moves every particle alike, which shows as
 * displacements of the same frame being correlated between tracks.
 *
 * With x_i the mean-free displacement of track i in a frame, the sum over pairs of tracks C = Σ_{i≠j} x_i·x_j has mean
 * zero for independent tracks. Its standard error comes from blocks of consecutive frames, since velocities may be
 * remembered from one frame to the next. A constant drift is judged apart, from the scatter of track means.
 */

import { INTERVAL_TOLERANCE } from '../tracks/runs.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';

export interface CommonDrift {
  /** Correlation of simultaneous displacements of two tracks (mean motion removed); null with too few of them. */
  readonly correlation: number | null;
  /** The correlation in its standard errors. */
  readonly standardErrors: number | null;
  /** Length d: mean velocity over all tracks, length/time. */
  readonly meanVelocity: readonly number[];
  /** Length d: its standard error from the scatter of tracks; null with fewer than two tracks. */
  readonly meanVelocityError: readonly number[] | null;
}

const FRAME_BLOCKS = 30;
const FEWEST_BLOCKS = 8;

/** Correlates simultaneous displacements over tracks. */
export function estimateCommonDrift(tracks: TrackSet, tolerance = INTERVAL_TOLERANCE): CommonDrift {
  const { dimensions, positions, times, trackOffsets, samplingInterval } = tracks;
  const m = countTracks(tracks);
  const frameSums = new Map<number, Float64Array>(); // per frame: d sums, then count and sum of squares
  const trackSums = new Float64Array(m * dimensions);
  const trackCounts = new Float64Array(m);
  const mean = new Float64Array(dimensions);
  let count = 0;
  const forEachDisplacement = (visit: (track: number, row: number) => void): void => {
    for (let track = 0; track < m; track++) {
      for (let row = trackOffsets[track]; row < trackOffsets[track + 1] - 1; row++) {
        const step = times[row + 1] - times[row];
        if (Math.abs(step - samplingInterval) <= tolerance * samplingInterval) visit(track, row);
      }
    }
  };
  const displacement = (row: number, axis: number): number =>
    positions[(row + 1) * dimensions + axis] - positions[row * dimensions + axis];
  forEachDisplacement((track, row) => {
    for (let axis = 0; axis < dimensions; axis++) {
      trackSums[track * dimensions + axis] += displacement(row, axis);
      mean[axis] += displacement(row, axis);
    }
    trackCounts[track]++;
    count++;
  });
  for (let axis = 0; axis < dimensions; axis++) mean[axis] /= Math.max(count, 1);
  let squaresOfAll = 0;
  forEachDisplacement((_, row) => {
    const frame = Math.round(times[row] / samplingInterval);
    let sums = frameSums.get(frame);
    if (sums === undefined) {
      sums = new Float64Array(dimensions + 2);
      frameSums.set(frame, sums);
    }
    sums[dimensions]++;
    for (let axis = 0; axis < dimensions; axis++) {
      const x = displacement(row, axis) - mean[axis];
      sums[axis] += x;
      sums[dimensions + 1] += x * x;
      squaresOfAll += x * x;
    }
  });
  return {
    ...correlateFrames(frameSums, dimensions, squaresOfAll / Math.max(count, 1)),
    meanVelocity: Array.from(mean, (value) => value / samplingInterval),
    meanVelocityError: estimateMeanError(trackSums, trackCounts, mean, count, samplingInterval),
  };
}

function correlateFrames(
  frameSums: ReadonlyMap<number, Float64Array>,
  dimensions: number,
  variance: number,
): Pick<CommonDrift, 'correlation' | 'standardErrors'> {
  const frames = [...frameSums.keys()].filter((frame) => (frameSums.get(frame)?.[dimensions] ?? 0) >= 2);
  frames.sort((a, b) => a - b);
  const blocks = Math.min(FRAME_BLOCKS, frames.length);
  if (blocks < FEWEST_BLOCKS || !(variance > 0)) return { correlation: null, standardErrors: null };
  const products = new Float64Array(blocks);
  let pairs = 0;
  frames.forEach((frame, index) => {
    const sums = frameSums.get(frame);
    if (sums === undefined) return;
    let product = -sums[dimensions + 1];
    for (let axis = 0; axis < dimensions; axis++) product += sums[axis] * sums[axis];
    products[Math.floor((index * blocks) / frames.length)] += product;
    pairs += sums[dimensions] * (sums[dimensions] - 1);
  });
  const total = products.reduce((sum, value) => sum + value, 0);
  let squares = 0;
  for (let block = 0; block < blocks; block++) squares += (products[block] - total / blocks) ** 2;
  const error = Math.sqrt((squares * blocks) / (blocks - 1));
  return { correlation: total / (pairs * variance), standardErrors: error > 0 ? total / error : null };
}

function estimateMeanError(
  trackSums: Float64Array,
  trackCounts: Float64Array,
  mean: Float64Array,
  count: number,
  samplingInterval: number,
): number[] | null {
  const m = trackCounts.length;
  if (m < 2 || count === 0) return null;
  return Array.from(mean, (value, axis) => {
    let squares = 0;
    for (let track = 0; track < m; track++) {
      squares += (trackSums[track * mean.length + axis] - value * trackCounts[track]) ** 2;
    }
    return Math.sqrt((squares * m) / (m - 1)) / (count * samplingInterval);
  });
}

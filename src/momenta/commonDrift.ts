/**
 * Drift common to all tracks: a sliding stage or a breathing sample moves every particle alike, which shows as
 * displacements of the same frame being correlated between tracks.
 *
 * With x_i the mean-free displacement (or change of displacement) of track i in a frame, the sum over frames and ordered pairs of tracks
 * C = Σ_f Σ_{i≠j} x_i·x_j has mean zero for independent tracks. Velocities may be remembered from one frame to the next,
 * so frames are not independent; from the autocorrelations ρ_j of single tracks,
 *
 *     Var C = 2 Σ_axes (1 + 2 Σ_j ρ_j²) Σ_f (1 − 1/n_f) (Σ_i x_i²)²,
 *
 * n_f the tracks in the frame. C is a sum of squares, so its law is taken for a shifted χ² of that variance
 * (Satterthwaite, Biometrics Bull. 2 (1946) 110). A constant drift is judged apart, from the scatter of track means.
 */

import { chiSquareTail } from '../numerics/special/chiSquareTail.js';
import { INTERVAL_TOLERANCE } from '../tracks/runs.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import type { DisplacementCovariances } from './displacementCovariances.js';

export interface CommonDrift {
  /** Correlation of what two tracks do at the same time (mean motion removed); null with too few of them. */
  readonly correlation: number | null;
  /** The correlation in the standard errors it has for independent tracks. */
  readonly standardErrors: number | null;
  /** Probability of a correlation as large for independent tracks. */
  readonly chance: number | null;
  /** Length d: mean velocity over all tracks, length/time. */
  readonly meanVelocity: readonly number[];
  /** Length d: its standard error from the scatter of tracks; null with fewer than two tracks. */
  readonly meanVelocityError: readonly number[] | null;
}

const FEWEST_FRAMES = 8;

/** Sums over the tracks that have a displacement in one frame. */
interface FrameSums {
  tracks: number;
  /** Length d: Σ x, length. */
  readonly sums: Float64Array;
  /** Length d: Σ x², length². */
  readonly squares: Float64Array;
}

/**
 * Correlates simultaneous displacements over tracks, and simultaneous changes of displacement: a shaking stage stands
 * out among the latter where velocities last long, a slow drift among the former. The less probable one is reported.
 *
 * @param covariances  those of the same tracks
 */
export function estimateCommonDrift(
  tracks: TrackSet,
  covariances: DisplacementCovariances,
  tolerance = INTERVAL_TOLERANCE,
): CommonDrift {
  const m = countTracks(tracks);
  const { meanDisplacement: mean, covariances: displacements } = covariances;
  const meanVelocity = Array.from(mean, (value) => value / tracks.samplingInterval);
  if (m < 2) {
    return { correlation: null, standardErrors: null, chance: null, meanVelocity, meanVelocityError: null };
  }
  const moves = sumFrames(tracks, 1, mean, tolerance);
  const changes = sumFrames(tracks, 2, mean, tolerance);
  const ofMoves = correlateFrames(moves.frames, displacements);
  const ofChanges = correlateFrames(changes.frames, displacements.map(differenceTwice));
  const time = moves.count * tracks.samplingInterval;
  return {
    ...((ofChanges.chance ?? 1) < (ofMoves.chance ?? 1) ? ofChanges : ofMoves),
    meanVelocity,
    meanVelocityError: time === 0 ? null : measureMeanError(moves.trackSums, m, time),
  };
}

/** First or second differences that start in each frame, less their mean; and their sums over each track, (m, d). */
function sumFrames(
  tracks: TrackSet,
  order: 1 | 2,
  mean: Float64Array,
  tolerance: number,
): { frames: FrameSums[]; trackSums: Float64Array; count: number } {
  const { dimensions, positions, times, trackOffsets, samplingInterval } = tracks;
  const frames = new Map<number, FrameSums>();
  const trackSums = new Float64Array(countTracks(tracks) * dimensions);
  const isOneFrame = (row: number): boolean =>
    Math.abs(times[row + 1] - times[row] - samplingInterval) <= tolerance * samplingInterval;
  let count = 0;
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1] - order; row++) {
      if (!isOneFrame(row) || (order === 2 && !isOneFrame(row + 1))) continue;
      const key = Math.round(times[row] / samplingInterval);
      let frame = frames.get(key);
      if (frame === undefined) {
        frame = { tracks: 0, sums: new Float64Array(dimensions), squares: new Float64Array(dimensions) };
        frames.set(key, frame);
      }
      frame.tracks++;
      count++;
      for (let axis = 0; axis < dimensions; axis++) {
        const at = row * dimensions + axis;
        const move = positions[at + dimensions] - positions[at];
        const x =
          order === 1
            ? move - mean[axis]
            : positions[at + 2 * dimensions] - positions[at + dimensions] - move;
        frame.sums[axis] += x;
        frame.squares[axis] += x * x;
        trackSums[track * dimensions + axis] += x;
      }
    }
  }
  return { frames: [...frames.values()], trackSums, count };
}

/** Autocovariances of the changes of a series from those of the series: 2c_j − c_{j−1} − c_{j+1}. */
function differenceTwice(covariances: Float64Array): Float64Array {
  return covariances
    .subarray(0, -1)
    .map((value, lag) => 2 * value - covariances[Math.abs(lag - 1)] - covariances[lag + 1]);
}

function correlateFrames(
  frames: readonly FrameSums[],
  covariances: readonly Float64Array[],
): Pick<CommonDrift, 'correlation' | 'standardErrors' | 'chance'> {
  const shared = frames.filter((frame) => frame.tracks >= 2);
  let products = 0; // C
  let largest = 0; // what C would be if all tracks moved as one
  let total = 0; // Σ x²
  let variance = 0;
  for (let axis = 0; axis < covariances.length; axis++) {
    const inflation = measureMemory(covariances[axis]);
    for (const { tracks, sums, squares } of shared) {
      products += sums[axis] * sums[axis] - squares[axis];
      largest += (tracks - 1) * squares[axis];
      total += squares[axis];
      variance += 2 * inflation * (1 - 1 / tracks) * squares[axis] * squares[axis];
    }
  }
  if (shared.length < FEWEST_FRAMES || !(variance > 0)) {
    return { correlation: null, standardErrors: null, chance: null };
  }
  const standardErrors = products / Math.sqrt(variance);
  const freedom = (2 * total * total) / variance; // of Σ_f (Σ_i x_i)², which C is but for its mean
  const scaled = freedom + standardErrors * Math.sqrt(2 * freedom);
  return { correlation: products / largest, standardErrors, chance: chiSquareTail(scaled, freedom) };
}

/**
 * 1 + 2 Σ ρ_j² over all lags: how many frames of a remembered motion make one independent one. Beyond the last lag
 * known the sum goes on geometrically, by the ratio of its two halves.
 */
function measureMemory(covariances: Float64Array): number {
  const lags = covariances.length - 1;
  const halves = [0, 0];
  for (let lag = 1; lag <= lags; lag++)
    halves[2 * lag > lags ? 1 : 0] += (covariances[lag] / covariances[0]) ** 2;
  const sum = halves[0] + halves[1];
  const ratio = Math.min(halves[1] / halves[0], 0.9);
  return 1 + 2 * (ratio > 0 ? sum + (halves[1] * ratio) / (1 - ratio) : sum);
}

/** Standard error of the mean velocity per axis, from the scatter of mean-free track sums. */
function measureMeanError(trackSums: Float64Array, tracks: number, time: number): number[] {
  const dimensions = trackSums.length / tracks;
  return Array.from({ length: dimensions }, (_, axis) => {
    let squares = 0;
    for (let track = 0; track < tracks; track++) squares += trackSums[track * dimensions + axis] ** 2;
    return Math.sqrt((squares * tracks) / (tracks - 1)) / time;
  });
}

/**
 * Autocovariances of the displacements per frame, summed block by block so that errors can be had from the scatter of
 * blocks. A displacement is only taken over one sampling interval; a pair of them `j` frames apart counts wherever
 * both exist in the same track, also across a gap.
 */

import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import { INTERVAL_TOLERANCE } from '../tracks/runs.js';

export interface DisplacementCovariances {
  readonly dimensions: number;
  /** Largest lag L. */
  readonly lags: number;
  /** Number of blocks B: tracks, or stretches of tracks where there are few and long ones. */
  readonly blocks: number;
  /** Shape (B, L + 1): pairs of displacements at each lag (the same for every axis). */
  readonly pairs: Float64Array;
  /** Per axis, shape (B, L + 1): sums of products of mean-free displacements, length². */
  readonly sums: readonly Float64Array[];
  /** Length L + 1: pairs over all blocks. */
  readonly totalPairs: Float64Array;
  /** Per axis, length L + 1: pooled autocovariance, length²; NaN where no pair exists. */
  readonly covariances: readonly Float64Array[];
  /** Length d: mean displacement per frame (removed before the products are formed), length. */
  readonly meanDisplacement: Float64Array;
}

export interface DisplacementCovarianceOptions {
  /** Largest lag wanted; default 40. Fewer where the tracks do not support it. */
  readonly lags?: number;
  /** Relative deviation from the usual interval up to which a step still counts as one frame; default as for runs. */
  readonly tolerance?: number;
}

const DEFAULT_LAGS = 40; // beyond the memory of prediction for any signal-to-noise a survey can use
const FEW_TRACKS = 30; // with fewer, tracks are cut into stretches to have enough blocks for an error
const STRETCH = 100; // frames, at least; longer than most memories
const SUPPORT = 0.1; // a lag is used if it has at least this share of the pairs at lag 0
const SMALLEST_SUPPORT = 10; // and at least so many

/** Displacement autocovariances up to the largest lag the tracks support. */
export function estimateDisplacementCovariances(
  tracks: TrackSet,
  options: DisplacementCovarianceOptions = {},
): DisplacementCovariances {
  const { dimensions, positions, times, trackOffsets, samplingInterval } = tracks;
  const tolerance = options.tolerance ?? INTERVAL_TOLERANCE;
  const wanted = options.lags ?? DEFAULT_LAGS;
  const n = times.length;
  const m = countTracks(tracks);

  // frame[r]: frames since the start of the track of the displacement that starts at row r, −1 where there is none
  const frame = new Int32Array(n).fill(-1);
  const mean = new Float64Array(dimensions);
  let count = 0;
  for (let track = 0; track < m; track++) {
    const origin = times[trackOffsets[track]];
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1] - 1; row++) {
      const step = times[row + 1] - times[row];
      if (Math.abs(step - samplingInterval) > tolerance * samplingInterval) continue;
      frame[row] = Math.round((times[row] - origin) / samplingInterval);
      for (let axis = 0; axis < dimensions; axis++) {
        mean[axis] += positions[(row + 1) * dimensions + axis] - positions[row * dimensions + axis];
      }
      count++;
    }
  }
  for (let axis = 0; axis < dimensions; axis++) mean[axis] /= Math.max(count, 1);

  const { blockOfRow, blocks } = assignBlocks(tracks, frame, count);
  const width = wanted + 1;
  const pairs = new Float64Array(blocks * width);
  const sums = Array.from({ length: dimensions }, () => new Float64Array(blocks * width));
  const moves = new Float64Array(n * dimensions); // mean-free displacement that starts at each row
  for (let i = 0; i + dimensions < moves.length; i++) {
    moves[i] = positions[i + dimensions] - positions[i] - mean[i % dimensions];
  }
  for (let track = 0; track < m; track++) {
    const end = trackOffsets[track + 1] - 1;
    for (let row = trackOffsets[track]; row < end; row++) {
      if (frame[row] < 0) continue;
      const base = blockOfRow[row] * width;
      for (let other = row; other < end; other++) {
        if (frame[other] < 0) continue;
        const lag = frame[other] - frame[row];
        if (lag > wanted) break;
        pairs[base + lag]++;
        for (let axis = 0; axis < dimensions; axis++) {
          sums[axis][base + lag] += moves[row * dimensions + axis] * moves[other * dimensions + axis];
        }
      }
    }
  }
  return pool(trimLags({ dimensions, lags: wanted, blocks, pairs, sums }), mean);
}

/** Tracks are the blocks where there are many; else stretches of at least `STRETCH` displacements. */
function assignBlocks(
  tracks: TrackSet,
  frame: Int32Array,
  count: number,
): { blockOfRow: Int32Array; blocks: number } {
  const { trackOffsets } = tracks;
  const m = countTracks(tracks);
  const blockOfRow = new Int32Array(frame.length);
  const stretch = m >= FEW_TRACKS ? Infinity : Math.max(STRETCH, Math.ceil(count / 60));
  let block = -1;
  for (let track = 0; track < m; track++) {
    let filled = Infinity; // every track starts a block of its own
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1]; row++) {
      if (frame[row] < 0) continue;
      if (filled >= stretch) {
        block++;
        filled = 0;
      }
      blockOfRow[row] = block;
      filled++;
    }
  }
  return { blockOfRow, blocks: block + 1 };
}

type Sums = Pick<DisplacementCovariances, 'dimensions' | 'lags' | 'blocks' | 'pairs' | 'sums'>;

/** Drops the lags that too few pairs support. */
function trimLags(all: Sums): Sums {
  const width = all.lags + 1;
  const support = new Float64Array(width);
  for (let block = 0; block < all.blocks; block++) {
    for (let lag = 0; lag < width; lag++) support[lag] += all.pairs[block * width + lag];
  }
  const least = Math.max(SMALLEST_SUPPORT, SUPPORT * support[0]);
  let lags = 0;
  while (lags < all.lags && support[lags + 1] >= least) lags++;
  const trim = (values: Float64Array): Float64Array => {
    const kept = new Float64Array(all.blocks * (lags + 1));
    for (let block = 0; block < all.blocks; block++) {
      for (let lag = 0; lag <= lags; lag++) kept[block * (lags + 1) + lag] = values[block * width + lag];
    }
    return kept;
  };
  return { ...all, lags, pairs: trim(all.pairs), sums: all.sums.map(trim) };
}

function pool(parts: Sums, meanDisplacement: Float64Array): DisplacementCovariances {
  const width = parts.lags + 1;
  const addUp = (values: Float64Array): Float64Array => {
    const total = new Float64Array(width);
    for (let i = 0; i < values.length; i++) total[i % width] += values[i];
    return total;
  };
  const totalPairs = addUp(parts.pairs);
  const covariances = parts.sums.map((sums) => addUp(sums).map((sum, lag) => sum / totalPairs[lag]));
  return { ...parts, totalPairs, covariances, meanDisplacement };
}

/**
 * Blocks: the units the bootstrap resamples. Tracks are independent, so whole tracks (or groups of them) where there
 * are many; stretches of a track longer than its memory where tracks are few and long.
 *
 * Source  Künsch, The jackknife and the bootstrap for general stationary observations, Ann. Statist. 17 (1989) 1217.
 */

import { countPositions, countTracks, type TrackSet } from '../tracks/TrackSet.js';

export interface Blocks {
  readonly count: number;
  /** Length n: block of each position. */
  readonly ofPosition: Int32Array;
  readonly kind: 'tracks' | 'stretches';
}

const ENOUGH_TRACKS = 30; // below this a t quantile on so few units widens intervals by more than 4 %
const STRETCHES = 80;
const MEMORIES_PER_STRETCH = 20; // leaves at most a few per cent of the variance in correlations across borders

/**
 * Splits the positions into blocks that may be taken as independent.
 *
 * @param memory  longest memory of the process to respect, time
 * @param most  upper bound on the number of blocks (they cost memory)
 */
export function partitionBlocks(tracks: TrackSet, memory: number, most = 100): Blocks {
  const trackCount = countTracks(tracks);
  return trackCount >= ENOUGH_TRACKS ? trackBlocks(tracks, most) : stretchBlocks(tracks, memory, most);
}

/** Whole tracks, dealt into groups of about equal size, longest first. */
function trackBlocks(tracks: TrackSet, most: number): Blocks {
  const { trackOffsets } = tracks;
  const order = canonicalOrder(tracks);
  const count = Math.min(order.length, most);
  const filled = new Float64Array(count);
  const ofPosition = new Int32Array(countPositions(tracks));
  for (const track of order) {
    let block = 0;
    for (let candidate = 1; candidate < count; candidate++)
      if (filled[candidate] < filled[block]) block = candidate;
    filled[block] += trackOffsets[track + 1] - trackOffsets[track];
    ofPosition.fill(block, trackOffsets[track], trackOffsets[track + 1]);
  }
  return { count, ofPosition, kind: 'tracks' };
}

/**
 * Tracks by falling length, then by path length: an order that does not depend on names, on the order of rows, or on
 * shifts and rotations of the plane, so that none of these changes a result.
 *
 * @returns track numbers
 */
export function canonicalOrder(tracks: TrackSet): number[] {
  const { trackOffsets, positions, dimensions } = tracks;
  const paths = new Float64Array(countTracks(tracks));
  for (let track = 0; track < paths.length; track++) {
    for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
      for (let axis = 0; axis < dimensions; axis++) {
        paths[track] += (positions[row * dimensions + axis] - positions[(row - 1) * dimensions + axis]) ** 2;
      }
    }
  }
  const lengths = Array.from(paths, (_, track) => trackOffsets[track + 1] - trackOffsets[track]);
  return Array.from(paths.keys()).sort((a, b) => lengths[b] - lengths[a] || paths[b] - paths[a]);
}

function stretchBlocks(tracks: TrackSet, memory: number, most: number): Blocks {
  const { trackOffsets, samplingInterval } = tracks;
  const positions = countPositions(tracks);
  const shortest = Math.ceil((MEMORIES_PER_STRETCH * memory) / samplingInterval);
  const length = Math.max(10, shortest, Math.ceil(positions / Math.min(STRETCHES, most)));
  const ofPosition = new Int32Array(positions);
  let count = 0;
  for (const track of canonicalOrder(tracks)) {
    const start = trackOffsets[track];
    const rows = trackOffsets[track + 1] - start;
    const pieces = Math.max(1, Math.round(rows / length));
    for (let row = 0; row < rows; row++) ofPosition[start + row] = count + Math.floor((row * pieces) / rows);
    count += pieces;
  }
  return { count, ofPosition, kind: 'stretches' };
}

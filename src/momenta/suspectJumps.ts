/**
 * Steps that look like wrong links: a displacement, or a change of displacement, far out of line with its neighbours
 * in the same track and far beyond where the tail of all the others would reach.
 *
 * Each step is measured against the median of its neighbours, so that places of strong noise are no reason to flag;
 * and the bulk's tail is extrapolated as an exponential, so that heavy but smooth tails are none either.
 */

import { median, medianInPlace, selectInPlace } from '../numerics/statistics/quantile.js';
import { INTERVAL_TOLERANCE } from '../tracks/runs.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';

const NEIGHBOURS = 5; // on either side
const LOCAL_FLOOR = 0.7; // of the overall median: a chance lull does not make its neighbour an outlier
const TAIL_SHARE = 0.03; // the part of the steps whose excess sets the scale of the tail
const BEYOND = 7; // e-foldings past the largest step expected: one false alarm in about a thousand recordings
const SMALLEST_RATIO = 10; // neighbourhood medians; nothing nearer is called a jump (about 7 standard deviations)
const FEWEST_STEPS = 100;

/**
 * Rows at which a suspect step starts (the step leads to the next row), in increasing order.
 */
export function findSuspectJumps(tracks: TrackSet, tolerance = INTERVAL_TOLERANCE): Int32Array {
  const steps = measureSteps(tracks, tolerance, 1);
  const turns = measureSteps(tracks, tolerance, 2);
  const suspects = new Set(findOutliers(steps, tracks, 1));
  // A jump makes two large changes of displacement in a row; it is laid to the larger displacement of the two.
  for (const row of findOutliers(turns, tracks, 2)) {
    suspects.add(row + 1 < steps.length && steps[row + 1] > steps[row] ? row + 1 : row);
  }
  return Int32Array.from(suspects).sort();
}

/** Root mean square over axes of the (first or second) difference that starts at each row, each axis in units of its
 * median; NaN where there is none. */
function measureSteps(tracks: TrackSet, tolerance: number, order: 1 | 2): Float64Array {
  const { dimensions, positions, times, trackOffsets, samplingInterval } = tracks;
  const n = times.length;
  const size = new Float64Array(n).fill(NaN);
  const usable = (row: number): boolean =>
    Math.abs(times[row + 1] - times[row] - samplingInterval) <= tolerance * samplingInterval;
  const rows = new Int32Array(n);
  let count = 0;
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1] - order; row++) {
      if (usable(row) && (order === 1 || usable(row + 1))) rows[count++] = row;
    }
  }
  const values = new Float64Array(count);
  for (let axis = 0; axis < dimensions; axis++) {
    for (let i = 0; i < count; i++) {
      const at = rows[i] * dimensions + axis;
      const step = positions[at + dimensions] - positions[at];
      values[i] = Math.abs(
        order === 1 ? step : positions[at + 2 * dimensions] - positions[at + dimensions] - step,
      );
    }
    const usual = median(values);
    if (!(usual > 0)) continue;
    for (let i = 0; i < count; i++) {
      const before = Number.isNaN(size[rows[i]]) ? 0 : size[rows[i]];
      const own = values[i] / usual;
      size[rows[i]] = Math.sqrt(before * before + own * own);
    }
  }
  return size;
}

function findOutliers(size: Float64Array, tracks: TrackSet, order: 1 | 2): number[] {
  const all = new Int32Array(size.length);
  let count = 0;
  for (let row = 0; row < size.length; row++) if (!Number.isNaN(size[row])) all[count++] = row;
  if (count < FEWEST_STEPS) return [];
  const rows = all.subarray(0, count);
  const overall = medianInPlace(Float64Array.from(rows, (row) => size[row]));
  const ratios = new Float64Array(count);
  const { trackOffsets } = tracks;
  let track = 0;
  const neighbours = new Float64Array(2 * NEIGHBOURS);
  for (let i = 0; i < count; i++) {
    const row = rows[i];
    while (row >= trackOffsets[track + 1]) track++;
    let found = 0;
    for (let shift = -NEIGHBOURS - order + 1; shift <= NEIGHBOURS + order - 1; shift++) {
      if (Math.abs(shift) < order) continue; // neighbouring second differences share the jump itself
      const other = row + shift;
      if (other < trackOffsets[track] || other >= trackOffsets[track + 1] || Number.isNaN(size[other]))
        continue;
      if (found < neighbours.length) found = insertSorted(neighbours, found, size[other]);
    }
    const local = found >= NEIGHBOURS ? (neighbours[(found - 1) >> 1] + neighbours[found >> 1]) / 2 : overall;
    ratios[i] = size[row] / Math.max(local, LOCAL_FLOOR * overall);
  }
  const ranked = ratios.slice();
  const tailMedian = selectInPlace(ranked, Math.floor((1 - TAIL_SHARE / 2) * (count - 1)));
  const tailStart = selectInPlace(ranked, Math.floor((1 - TAIL_SHARE) * (count - 1)));
  const scale = (tailMedian - tailStart) / Math.LN2; // of the exponential with that median excess
  const reach = tailStart + scale * (Math.log(TAIL_SHARE * count) + BEYOND);
  const limit = Math.max(SMALLEST_RATIO, reach);
  const suspects: number[] = [];
  for (let i = 0; i < count; i++) if (ratios[i] > limit) suspects.push(rows[i]);
  return suspects;
}

/** Puts a value among the first `count`, which ascend; returns the new count. */
function insertSorted(values: Float64Array, count: number, value: number): number {
  let place = count;
  while (place > 0 && values[place - 1] > value) {
    values[place] = values[place - 1];
    place--;
  }
  values[place] = value;
  return count + 1;
}

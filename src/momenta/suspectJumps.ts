/**
 * Steps that look like wrong links: a displacement, or a change of displacement, far out of line with its neighbours
 * in the same track and far beyond where the tail of all the others would reach.
 *
 * Each step is measured against the median of its neighbours, so that places of strong noise are no reason to flag;
 * and the bulk's tail is extrapolated as an exponential, so that heavy but smooth tails are none either.
 */

import { median } from '../numerics/statistics/quantile.js';
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
  const rows: number[] = [];
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1] - order; row++) {
      if (usable(row) && (order === 1 || usable(row + 1))) rows.push(row);
    }
  }
  const values = new Float64Array(rows.length);
  for (let axis = 0; axis < dimensions; axis++) {
    for (let i = 0; i < rows.length; i++) {
      const at = rows[i] * dimensions + axis;
      const step = positions[at + dimensions] - positions[at];
      values[i] = Math.abs(
        order === 1 ? step : positions[at + 2 * dimensions] - positions[at + dimensions] - step,
      );
    }
    const usual = median(values);
    if (!(usual > 0)) continue;
    for (let i = 0; i < rows.length; i++) {
      const before = Number.isNaN(size[rows[i]]) ? 0 : size[rows[i]];
      size[rows[i]] = Math.hypot(before, values[i] / usual);
    }
  }
  return size;
}

function findOutliers(size: Float64Array, tracks: TrackSet, order: 1 | 2): number[] {
  const rows: number[] = [];
  for (let row = 0; row < size.length; row++) if (!Number.isNaN(size[row])) rows.push(row);
  if (rows.length < FEWEST_STEPS) return [];
  const overall = median(Float64Array.from(rows, (row) => size[row]));
  const ratios = new Float64Array(rows.length);
  const { trackOffsets } = tracks;
  let track = 0;
  const neighbours = new Float64Array(2 * NEIGHBOURS);
  for (let i = 0; i < rows.length; i++) {
    const row = rows[i];
    while (row >= trackOffsets[track + 1]) track++;
    let found = 0;
    for (let shift = -NEIGHBOURS - order + 1; shift <= NEIGHBOURS + order - 1; shift++) {
      if (Math.abs(shift) < order) continue; // neighbouring second differences share the jump itself
      const other = row + shift;
      if (other < trackOffsets[track] || other >= trackOffsets[track + 1] || Number.isNaN(size[other]))
        continue;
      if (found < neighbours.length) neighbours[found++] = size[other];
    }
    const local = found >= NEIGHBOURS ? median(neighbours.subarray(0, found)) : overall;
    ratios[i] = size[row] / Math.max(local, LOCAL_FLOOR * overall);
  }
  const sorted = ratios.slice().sort();
  const tailStart = sorted[Math.floor((1 - TAIL_SHARE) * (sorted.length - 1))];
  const tailMedian = sorted[Math.floor((1 - TAIL_SHARE / 2) * (sorted.length - 1))];
  const scale = (tailMedian - tailStart) / Math.LN2; // of the exponential with that median excess
  const reach = tailStart + scale * (Math.log(TAIL_SHARE * rows.length) + BEYOND);
  const limit = Math.max(SMALLEST_RATIO, reach);
  return rows.filter((_, i) => ratios[i] > limit);
}

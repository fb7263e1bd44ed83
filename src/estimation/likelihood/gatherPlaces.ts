/**
 * Positions gathered into groups that lie so close together that the information about the coefficients is the same in
 * all of them: what a recording of any length tells is then summed over some thousand places.
 */

import { countPositions, countTracks, type TrackSet } from '../../tracks/TrackSet.js';
import { describeVisited } from '../../tracks/visitedRegion.js';
import type { LikelihoodLayout } from './layout.js';
import { measureCells } from './measureCells.js';

export interface PlaceGroups {
  readonly count: number;
  /** Shape (G, d): mean place. */
  readonly places: Float64Array;
  /** Length G: steps of the recording that end in the group. */
  readonly steps: Float64Array;
  /** Length G: their mean interval, time. */
  readonly intervals: Float64Array;
  /** Shape (G, d): mean localization error variance, length²; null where it is the same for all positions. */
  readonly errorVariances: Float64Array | null;
  /** Shape (G, d): mean velocity by which particles are carried along, length/time; null where it does not matter. */
  readonly flow: Float64Array | null;
}

const PARTS = 5; // of a cell of the finest spline along an axis: a step function of so many parts is a spline to 0.3 %
const CELLS = [32, 12, 6] as const; // per axis of the visited box where no spline has cells, by dimensions
const INTERVAL_CLASS = 0.05; // of log interval
const MOST_CLASSES = 2000;

/**
 * Groups the positions of all tracks but their first ones.
 *
 * @param flow  shape (n, d), see `measureFlow`
 */
export function gatherPlaces(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  flow: Float64Array | null,
): PlaceGroups {
  const { dimensions: d, positions, times, trackOffsets, periods, localizationErrors } = tracks;
  const box = describeVisited(tracks);
  const widths = measureCells(layout).map((width, axis) => {
    const span = box.high[axis] - box.low[axis];
    return Math.min(width, span / CELLS[d - 1]) / PARTS;
  });
  const numbers = new Map<number, number>();
  const groupOf = new Int32Array(countPositions(tracks)).fill(-1);
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track] + 1; row < trackOffsets[track + 1]; row++) {
      const ratio = Math.log((times[row] - times[row - 1]) / tracks.samplingInterval) / INTERVAL_CLASS;
      let key = Math.max(0, Math.min(2 * MOST_CLASSES, MOST_CLASSES + Math.round(ratio)));
      for (let axis = 0; axis < d; axis++) {
        const low = box.low[axis];
        const parts = Math.ceil((box.high[axis] - low) / widths[axis]);
        let along = positions[row * d + axis] - low;
        if (periods[axis] > 0) along -= Math.floor(along / periods[axis]) * periods[axis];
        // Beyond the box fields are held at its edge.
        const part = Math.max(-1, Math.min(parts, Math.floor(along / widths[axis])));
        key = key * (parts + 2) + part + 1;
      }
      let group = numbers.get(key);
      if (group === undefined) numbers.set(key, (group = numbers.size));
      groupOf[row] = group;
    }
  }
  return averageGroups(tracks, groupOf, numbers.size, flow, localizationErrors);
}

function averageGroups(
  { dimensions: d, positions, times, periods }: TrackSet,
  groupOf: Int32Array,
  count: number,
  flow: Float64Array | null,
  errors: Float64Array | null,
): PlaceGroups {
  const steps = new Float64Array(count);
  const intervals = new Float64Array(count);
  const places = new Float64Array(count * d);
  const errorVariances = errors ? new Float64Array(count * d) : null;
  const carried = flow ? new Float64Array(count * d) : null;
  for (let row = 0; row < groupOf.length; row++) {
    const group = groupOf[row];
    if (group < 0) continue;
    steps[group]++;
    intervals[group] += times[row] - times[row - 1];
    for (let axis = 0; axis < d; axis++) {
      const at = row * d + axis;
      const period = periods[axis];
      places[group * d + axis] +=
        period > 0 ? positions[at] - Math.floor(positions[at] / period) * period : positions[at];
      if (errorVariances && errors) errorVariances[group * d + axis] += errors[at] ** 2;
      if (carried && flow) carried[group * d + axis] += flow[at];
    }
  }
  for (let group = 0; group < count; group++) {
    intervals[group] /= steps[group];
    for (let at = group * d; at < (group + 1) * d; at++) {
      places[at] /= steps[group];
      if (errorVariances) errorVariances[at] /= steps[group];
      if (carried) carried[at] /= steps[group];
    }
  }
  return { count, places, steps, intervals, errorVariances, flow: carried };
}

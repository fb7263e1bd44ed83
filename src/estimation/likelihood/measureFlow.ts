/** The mean velocity by place: where particles are carried along, friction shows in the mean motion as well. */

import { countTracks, type TrackSet } from '../../tracks/TrackSet.js';
import { findCell, type VisitedRegion } from '../../tracks/visitedRegion.js';

const CELLS = [24, 10, 6] as const; // per axis, by dimensions

/**
 * Mean secant velocity of the cell each position lies in.
 *
 * @param box  corners of the visited box
 * @returns shape (n, d), length/time; zero outside the box
 */
export function measureFlow(tracks: TrackSet, box: Pick<VisitedRegion, 'low' | 'high'>): Float64Array {
  const { dimensions: d, positions, times, trackOffsets, periods } = tracks;
  const cells = new Array<number>(d).fill(CELLS[d - 1]);
  const grid = { low: box.low, high: box.high, cells };
  const total = CELLS[d - 1] ** d;
  const sums = new Float64Array(total * d);
  const durations = new Float64Array(total);
  const cellOf = new Int32Array(times.length);
  for (let track = 0; track < countTracks(tracks); track++) {
    const end = trackOffsets[track + 1];
    for (let row = trackOffsets[track]; row < end; row++) {
      const cell = findCell(grid, periods, positions, row * d);
      cellOf[row] = cell;
      if (cell < 0 || row + 1 === end) continue;
      durations[cell] += times[row + 1] - times[row];
      for (let axis = 0; axis < d; axis++)
        sums[cell * d + axis] += positions[(row + 1) * d + axis] - positions[row * d + axis];
    }
  }
  const flow = new Float64Array(times.length * d);
  for (let row = 0; row < cellOf.length; row++) {
    const cell = cellOf[row];
    if (cell < 0 || durations[cell] === 0) continue;
    for (let axis = 0; axis < d; axis++) flow[row * d + axis] = sums[cell * d + axis] / durations[cell];
  }
  return flow;
}

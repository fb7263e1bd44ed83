/**
 * Tracks that stay put while the others move: stuck particles, dirt on the camera, frozen trackers.
 *
 * A track counts as immobile where the variance of its positions is below 1/200 of the usual track's and chance does
 * not explain that: among m tracks whose spread has the law of χ²_k/k, the narrowest falls below a ratio r with
 * probability at most m P(χ²_k < k r). For the degrees of freedom k the independent velocities of a remembered motion
 * are counted, 1 + duration/(2 × relaxation time) per axis, and never more than half the displacements: the spread of
 * a diffusing track is mostly that of its slowest modes.
 */

import { chiSquareTail } from '../numerics/special/chiSquareTail.js';
import { median } from '../numerics/statistics/quantile.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';

const RATIO = 0.005; // a localization error alone is usually narrower than a fourteenth of the range of a moving track
const CHANCE = 0.01; // of calling any track of a recording immobile that is not
const FEWEST_POSITIONS = 5;

/**
 * Counts the tracks that hardly move compared with the others.
 *
 * @param relaxationTime  of the velocity, time; null where velocities are not remembered
 */
export function countImmobileTracks(tracks: TrackSet, relaxationTime: number | null): number {
  const { dimensions, times, trackOffsets } = tracks;
  const spreads: number[] = [];
  const freedoms: number[] = [];
  for (let track = 0; track < countTracks(tracks); track++) {
    const start = trackOffsets[track];
    const end = trackOffsets[track + 1];
    if (end - start < FEWEST_POSITIONS) continue;
    spreads.push(measureSpread(tracks, start, end));
    const velocities =
      relaxationTime === null ? Infinity : 1 + (times[end - 1] - times[start]) / (2 * relaxationTime);
    freedoms.push(dimensions * Math.min((end - start - 1) / 2, velocities));
  }
  const usual = median(spreads);
  let count = 0;
  spreads.forEach((spread, i) => {
    const ratio = usual > 0 ? spread / usual : spread > 0 ? Infinity : 0;
    if (ratio > RATIO) return;
    const narrower = 1 - chiSquareTail(freedoms[i] * ratio, freedoms[i]);
    if (spreads.length * narrower < CHANCE) count++;
  });
  return count;
}

/** Variance of the positions of one track, summed over axes, length². */
function measureSpread({ dimensions, positions }: TrackSet, start: number, end: number): number {
  let spread = 0;
  for (let axis = 0; axis < dimensions; axis++) {
    const origin = positions[start * dimensions + axis];
    let sum = 0;
    let squares = 0;
    for (let row = start; row < end; row++) {
      const offset = positions[row * dimensions + axis] - origin;
      sum += offset;
      squares += offset * offset;
    }
    spread += Math.max(squares - (sum * sum) / (end - start), 0) / (end - start);
  }
  return spread;
}

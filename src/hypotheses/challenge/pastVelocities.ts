/** Velocities known before a step: secants of the recorded past, the instruments of challenges. */

import { countTracks } from '../../tracks/TrackSet.js';
import type { Innovations } from './innovations.js';

/**
 * For each row the mean velocity over `frames` steps that end one row earlier, length/time; NaN where there is none.
 * What the row's innovation holds is then new to it.
 *
 * @returns shape (n, d)
 */
export function measurePastVelocities({ tracks }: Innovations, frames: number): Float64Array {
  const { dimensions: d, positions, times, trackOffsets } = tracks;
  const out = new Float64Array(positions.length).fill(Number.NaN);
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track] + frames + 1; row < trackOffsets[track + 1]; row++) {
      const duration = times[row - 1] - times[row - 1 - frames];
      for (let axis = 0; axis < d; axis++) {
        const at = row * d + axis;
        out[at] = (positions[at - d] - positions[at - (frames + 1) * d]) / duration;
      }
    }
  }
  return out;
}

const ERROR_SHARE = 0.35; // of the root mean square velocity: localization error a secant may carry
const FORGOTTEN = 0.7; // relaxation times a secant may span

/** Steps a secant spans: more than one where localization error would swamp it. */
export function chooseSpan(innovations: Innovations, relaxationTime: number | null): number {
  const { tracks, estimate } = innovations;
  const { samplingInterval } = tracks;
  const speed = rootMeanSquare(measurePastVelocities(innovations, 1));
  const error = Math.max(...estimate.localizationError.map(({ value }) => value)) * Math.SQRT2;
  const wanted = Math.ceil(error / (ERROR_SHARE * speed * samplingInterval));
  const most = Math.floor((FORGOTTEN * (relaxationTime ?? samplingInterval)) / samplingInterval);
  return Math.max(1, Math.min(wanted, most));
}

export function rootMeanSquare(values: Float64Array): number {
  let squares = 0;
  let count = 0;
  for (let i = 0; i < values.length; i++) {
    if (values[i] !== values[i]) continue;
    squares += values[i] ** 2;
    count++;
  }
  return Math.sqrt(squares / Math.max(1, count));
}

/**
 * Memory: innovations correlated over time beyond what model and localization error bring about.
 *
 * Sums of z_k (z_{k−a} + … + z_{k−b}) over windows of lags that double in length, up to a few relaxation times; with
 * memory in friction or noise the prediction from position and velocity alone misses what the past still tells.
 *
 * Source  Ljung & Box, On a measure of lack of fit in time series models, Biometrika 65 (1978) 297; windows of lags:
 *         Hong, Consistent testing for serial correlation of unknown form, Econometrica 64 (1996) 837.
 */

import { countTracks } from '../../tracks/TrackSet.js';
import type { Finding } from './Finding.js';
import type { Innovations } from './innovations.js';
import { testSums } from './scoreTest.js';

const RELAXATIONS = 4; // reach of the last window
const SHORTEST_REACH = 4; // frames
const LONGEST_REACH = 64; // frames

/** @param relaxationTime  of the velocity, or null, time */
export function checkMemory(innovations: Innovations, relaxationTime: number | null): Finding {
  const { tracks, values } = innovations;
  const { dimensions: d, trackOffsets, samplingInterval } = tracks;
  const reach = Math.round((RELAXATIONS * (relaxationTime ?? samplingInterval)) / samplingInterval);
  const windows = listWindows(Math.max(SHORTEST_REACH, Math.min(LONGEST_REACH, reach)));
  const q = windows.length;
  const products = new Float64Array((values.length / d) * q);
  const pairs = new Float64Array(q);
  for (let track = 0; track < countTracks(tracks); track++) {
    const start = trackOffsets[track];
    for (let row = start; row < trackOffsets[track + 1]; row++) {
      windows.forEach(({ first, last }, window) => {
        for (let axis = 0; axis < d; axis++) {
          const now = values[row * d + axis];
          if (now !== now) continue;
          for (let lag = first; lag <= last && row - lag >= start; lag++) {
            const before = values[(row - lag) * d + axis];
            if (before !== before) continue;
            products[row * q + window] += now * before;
            pairs[window]++;
          }
        }
      });
    }
  }
  const test = testSums(innovations, products, q);
  let largest = 0;
  for (let i = 1; i < q; i++) {
    if (Math.abs(test.sums[i] / test.errors[i]) > Math.abs(test.sums[largest] / test.errors[largest]))
      largest = i;
  }
  const { first, last } = windows[largest];
  const correlation = test.sums[largest] / Math.max(1, pairs[largest]);
  const lags = first === last ? `${first} frame${first === 1 ? '' : 's'}` : `${first} to ${last} frames`;
  return {
    name: 'memory',
    assumption: 'what comes next depends on position and velocity alone',
    statistic: test.f,
    p: test.p,
    effect: {
      name: `correlation of prediction errors over ${lags}`,
      value: correlation,
      error: test.errors[largest] / Math.max(1, pairs[largest]),
    },
    found: `prediction errors are correlated by ${correlation.toFixed(3)} over ${lags}`,
    advice:
      'the particles or their surroundings remember more than a velocity: coefficients then depend on the interval between frames; compare fits at several intervals (every second, every fourth frame) and trust only what stays, or look for a missing variable',
  };
}

function listWindows(reach: number): { first: number; last: number }[] {
  const windows = [];
  for (let first = 1; first <= reach; ) {
    const last = first === 1 ? 1 : Math.min(reach, 2 * first - 2 + (first === 2 ? 0 : 1));
    windows.push({ first, last: Math.max(first, last) });
    first = Math.max(first, last) + 1;
  }
  return windows;
}

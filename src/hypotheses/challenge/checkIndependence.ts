/**
 * Independent tracks: whether particles recorded at the same time are pushed alike.
 *
 * With Z_f the sum of the m_f innovations of a frame along an axis, Σ_f (Z_f² − Σ z²) adds up the products of all pairs:
 * mean zero, variance Σ_f 2 m_f (m_f − 1) for independent tracks. Its law is a gamma law with the first three moments.
 * Unlike the displacements themselves, innovations are free of the pull of a common force field and of remembered
 * velocities.
 */

import { chiSquareTail } from '../../numerics/special/chiSquareTail.js';
import type { Finding, Skipped } from './Finding.js';
import type { Innovations } from './innovations.js';

const FEWEST_PAIRS = 50;

export function checkIndependence({ tracks, values }: Innovations): Finding | Skipped {
  const { dimensions: d, times, samplingInterval } = tracks;
  const frames = new Map<number, Float64Array>(); // per axis: sum, sum of squares, count
  for (let row = 0; row < times.length; row++) {
    const frame = Math.round(times[row] / samplingInterval);
    let sums = frames.get(frame);
    if (sums === undefined) {
      sums = new Float64Array(3 * d);
      frames.set(frame, sums);
    }
    for (let axis = 0; axis < d; axis++) {
      const z = values[row * d + axis];
      if (z !== z) continue;
      sums[3 * axis] += z;
      sums[3 * axis + 1] += z * z;
      sums[3 * axis + 2]++;
    }
  }
  let [total, variance, third, pairs] = [0, 0, 0, 0];
  for (const sums of frames.values()) {
    for (let axis = 0; axis < d; axis++) {
      const m = sums[3 * axis + 2];
      total += sums[3 * axis] ** 2 - sums[3 * axis + 1];
      variance += 2 * m * (m - 1);
      third += 8 * m * (m - 1) * (m - 2);
      pairs += m * (m - 1);
    }
  }
  if (pairs < FEWEST_PAIRS) {
    return { name: 'independent-tracks', reason: 'hardly any two tracks were recorded at the same time' };
  }
  const score = total / Math.sqrt(variance);
  const skewness = third / variance ** 1.5;
  const correlation = total / pairs;
  return {
    name: 'independent-tracks',
    assumption: 'tracks move independently of one another',
    statistic: score,
    p: gammaTail(score, skewness),
    effect: {
      name: 'correlation of simultaneous prediction errors of two tracks',
      value: correlation,
      error: Math.sqrt(variance) / pairs,
    },
    found: `steps of different tracks in the same frame are correlated by ${correlation.toFixed(3)}`,
    advice:
      'a drifting stage, a flow or interactions move particles together: subtract the common motion of each frame from the tracks and fit again; error bars that treat tracks as independent are too small',
  };
}

/** Upper tail of a standardised gamma variable of given skewness ≥ 0: (χ²_k − k)/√(2k) with k = 8/skewness². */
function gammaTail(score: number, skewness: number): number {
  const freedom = 8 / Math.max(skewness * skewness, 1e-6);
  return chiSquareTail(freedom + score * Math.sqrt(2 * freedom), freedom);
}

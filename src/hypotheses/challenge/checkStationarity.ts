/**
 * Stationarity: whether the coefficients stay the same over the recording.
 *
 * With τ the time of the recording from −1 to 1, sums of τ and (3τ² − 1)/2 times z² − 1 (noise), times z·v (friction; v
 * the velocity seen before the step) and times z along each axis (force or drift).
 *
 * Source  tests of constancy against slow trends: Nyblom, Testing for the constancy of parameters over time, J. Am.
 *         Stat. Assoc. 84 (1989) 223.
 */

import type { Finding, Skipped } from './Finding.js';
import type { Innovations } from './innovations.js';
import { chooseSpan, measurePastVelocities, rootMeanSquare } from './pastVelocities.js';
import { testSums } from './scoreTest.js';

export function checkStationarity(
  innovations: Innovations,
  relaxationTime: number | null,
): Finding | Skipped {
  const { values, tracks, order } = innovations;
  const { dimensions: d, times, coordinates } = tracks;
  const n = times.length;
  let first = Infinity;
  let last = -Infinity;
  for (let row = 0; row < n; row++) {
    first = Math.min(first, times[row]);
    last = Math.max(last, times[row]);
  }
  if (!(last > first)) return { name: 'stationarity', reason: 'all positions were recorded at one time' };
  const second = order === 'second';
  const velocities = second
    ? measurePastVelocities(innovations, chooseSpan(innovations, relaxationTime))
    : null;
  const unit = velocities ? rootMeanSquare(velocities) : 1;
  const kinds = ['noise', ...coordinates.map((axis) => `${second ? 'force' : 'drift'} along ${axis}`)];
  if (second) kinds.push('friction');
  const q = 2 * kinds.length;
  const products = new Float64Array(n * q);
  let weight = 0;
  for (let row = 0; row < n; row++) {
    const tau = (2 * (times[row] - first)) / (last - first) - 1;
    const trends = [tau, (3 * tau * tau - 1) / 2];
    for (let axis = 0; axis < d; axis++) {
      const z = values[row * d + axis];
      if (z !== z) continue;
      weight += tau * tau;
      const velocity = velocities ? velocities[row * d + axis] / unit : 0;
      for (let trend = 0; trend < 2; trend++) {
        const at = row * q + trend * kinds.length;
        products[at] += (trends[trend] * (z * z - 1)) / Math.SQRT2;
        products[at + 1 + axis] += trends[trend] * z;
        if (velocity === velocity) products[at + 1 + d] += trends[trend] * z * velocity;
      }
    }
  }
  // At first order the friction's slots stay out.
  const test = testSums(innovations, products, q);
  const scores = Array.from(test.sums, (sum, i) => Math.abs(sum / test.errors[i]) || 0);
  const largest = scores.indexOf(Math.max(...scores));
  const change = (2 * Math.SQRT2 * test.sums[0]) / weight; // E z² = 1 + change · τ/2 …, from end to end
  return {
    name: 'stationarity',
    assumption: 'the coefficients stay the same over the recording',
    statistic: test.f,
    p: test.p,
    effect: {
      name: 'relative change of the scatter of steps from start to end',
      value: change,
      error: (2 * Math.SQRT2 * test.errors[0]) / weight,
    },
    found: `over the recording the ${kinds[largest % kinds.length]} ${largest < kinds.length ? 'drifts' : 'bends'} most (${scores[largest].toFixed(1)} standard errors)`,
    advice:
      'the fit averages over conditions that changed; cut the recording into earlier and later parts, fit each, and compare, or find what drifted (temperature, focus, evaporation, ageing)',
  };
}

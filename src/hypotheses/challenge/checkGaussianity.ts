/**
 * Gaussian noise: whether standardised innovations follow the normal law.
 *
 * Smooth test of Neyman: sums of the third and fourth Legendre polynomials of 2Φ(z) − 1, for skewness and for the
 * weight of the tails. Location and scale are fitted, and what fitting them does is taken off with the rest of the
 * estimate. Bounded terms keep the test honest where a fourth moment would be at the mercy of a few values.
 *
 * Source  Neyman, "Smooth test" for goodness of fit, Skand. Aktuarietidskr. 20 (1937) 149; Rayner & Best, Smooth Tests of
 *         Goodness of Fit (1989), ch. 4.
 */

import { normalTail } from '../../numerics/special/normal.js';
import type { Finding } from './Finding.js';
import type { Innovations } from './innovations.js';
import { testSums } from './scoreTest.js';

export function checkGaussianity(innovations: Innovations): Finding {
  const { values, tracks } = innovations;
  const d = tracks.dimensions;
  const n = values.length / d;
  const products = new Float64Array(n * 2);
  let [count, squares, fourths, cubes] = [0, 0, 0, 0];
  for (let row = 0; row < n; row++) {
    for (let axis = 0; axis < d; axis++) {
      const z = values[row * d + axis];
      if (z !== z) continue;
      const u = 1 - 2 * normalTail(z);
      products[row * 2] += (Math.sqrt(7) / 2) * (5 * u * u * u - 3 * u);
      products[row * 2 + 1] += (3 / 8) * (35 * u ** 4 - 30 * u * u + 3);
      count++;
      squares += z * z;
      cubes += z * z * z;
      fourths += z ** 4;
    }
  }
  const test = testSums(innovations, products, 2);
  const variance = squares / Math.max(1, count);
  const excess = fourths / Math.max(1, count) / variance ** 2 - 3;
  const skewness = cubes / Math.max(1, count) / variance ** 1.5;
  const heavy = excess > 0 ? 'heavier' : 'lighter';
  return {
    name: 'gaussian-noise',
    assumption: 'the noise is Gaussian',
    statistic: test.f,
    p: test.p,
    effect: {
      name: 'excess kurtosis of prediction errors',
      value: excess,
      error: Math.sqrt(24 / Math.max(1, count)),
    },
    found: `prediction errors have ${heavy} tails than a normal law (excess kurtosis ${excess.toFixed(2)}) and skewness ${skewness.toFixed(2)}`,
    advice:
      'mean and variance of the motion are still right, but rare large displacements are not: do not read escape or first-passage times off the fitted model; look for mislinked steps, several kinds of particles, or kicks',
  };
}

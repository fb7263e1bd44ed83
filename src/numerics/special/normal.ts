/** The standard normal law, from a general-purpose library of distributions, mended far out in the tail. */

import normalCdf from '@stdlib/stats-base-dists-normal-cdf';
import normalQuantileOf from '@stdlib/stats-base-dists-normal-quantile';

/** Below this the library's quantile loses digits, and further out returns infinity. */
const FAR_OUT = 1e-5;

/** Probability that a standard normal variable exceeds a value. */
export function normalTail(value: number): number {
  return normalCdf(-value, 0, 1);
}

/** Value a standard normal variable stays below with the given probability. @param probability  from 0 to 1 */
export function normalQuantile(probability: number): number {
  if (!(probability > 0 && probability < FAR_OUT)) return normalQuantileOf(probability, 0, 1);
  // Newton's method on the logarithm of the tail, which is nearly a parabola there.
  const target = Math.log(probability);
  let x = Math.sqrt(-2 * target);
  for (let round = 0; round < 8; round++) {
    const tail = normalTail(x);
    if (tail === 0) return -x;
    const density = Math.exp(-0.5 * x * x) / Math.sqrt(2 * Math.PI);
    x += ((Math.log(tail) - target) * tail) / density;
  }
  return -x;
}

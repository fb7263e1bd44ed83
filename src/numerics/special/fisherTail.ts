/** Upper tail of Fisher's F distribution, from a general-purpose library of distributions. */

import fisherCdf from '@stdlib/stats-base-dists-f-cdf';

/**
 * Probability that an F variable exceeds a value.
 *
 * @param statistic  1 for values at or below 0
 * @param between  degrees of freedom of the numerator, > 0
 * @param within  degrees of freedom of the denominator, > 0
 */
export function fisherTail(statistic: number, between: number, within: number): number {
  if (statistic <= 0) return 1;
  // The reciprocal follows the law with the degrees exchanged: a lower tail keeps its digits where 1 − … would not.
  return fisherCdf(1 / statistic, within, between);
}

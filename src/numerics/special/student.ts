/** Student's t quantiles and tails, from a general-purpose library of distributions. */

import normalQuantileOf from '@stdlib/stats-base-dists-normal-quantile';
import studentCdf from '@stdlib/stats-base-dists-t-cdf';
import studentQuantileOf from '@stdlib/stats-base-dists-t-quantile';

/** Above this the t and normal laws agree to eight digits in all quantiles used here. */
const MANY = 1e9;

/** Quantile of Student's t. @param freedom  degrees of freedom, > 0 */
export function studentQuantile(probability: number, freedom: number): number {
  return freedom >= MANY ? normalQuantileOf(probability, 0, 1) : studentQuantileOf(probability, freedom);
}

/** Two-sided tail probability of Student's t. */
export function studentTail(statistic: number, freedom: number): number {
  return 2 * studentCdf(-Math.abs(statistic), freedom);
}

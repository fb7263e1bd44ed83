/** Sample quantiles. */

/**
 * Quantile of sorted values, linear between order statistics (type 7 of Hyndman & Fan, Am. Stat. 50 (1996) 361).
 *
 * @param sorted  length n ≥ 1, ascending
 * @param probability  from 0 to 1, ends included
 * @returns NaN for an empty list
 */
export function quantileSorted(sorted: ArrayLike<number>, probability: number): number {
  const n = sorted.length;
  if (n === 0) return NaN;
  const place = probability * (n - 1);
  const below = Math.floor(place);
  const above = Math.min(below + 1, n - 1);
  return sorted[below] + (place - below) * (sorted[above] - sorted[below]);
}

/** Median of values in any order. */
export function median(values: ArrayLike<number>): number {
  return quantileSorted(Float64Array.from(values).sort(), 0.5);
}

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

/** Median of values in any order; NaN for an empty list. */
export function median(values: ArrayLike<number>): number {
  return medianInPlace(Float64Array.from(values));
}

/** Median, leaving the values in another order. */
export function medianInPlace(values: Float64Array): number {
  return quantileInPlace(values, 0.5);
}

/** `quantileSorted` of values in any order, which are left in another one. Cost O(n) on average. */
export function quantileInPlace(values: Float64Array, probability: number): number {
  const n = values.length;
  if (n === 0) return NaN;
  const place = probability * (n - 1);
  const below = Math.floor(place);
  const low = selectInPlace(values, below);
  if (place === below) return low;
  let high = Infinity; // the next order statistic is the smallest of those behind
  for (let i = below + 1; i < n; i++) if (values[i] < high) high = values[i];
  return low + (place - below) * (high - low);
}

/**
 * The value of rank `rank` (from 0) in ascending order. Afterwards smaller values stand before it and larger ones behind.
 * Values must not be NaN.
 *
 * Source  Hoare, Find (algorithm 65), Commun. ACM 4 (1961) 321.
 */
export function selectInPlace(values: Float64Array, rank: number): number {
  let first = 0;
  let last = values.length - 1;
  while (first < last) {
    const pivot = middleOfThree(values[first], values[(first + last) >> 1], values[last]);
    let up = first;
    let down = last;
    while (up <= down) {
      while (values[up] < pivot) up++;
      while (values[down] > pivot) down--;
      if (up > down) break;
      const held = values[up];
      values[up++] = values[down];
      values[down--] = held;
    }
    if (rank <= down) last = down;
    else if (rank >= up) first = up;
    else break;
  }
  return values[rank];
}

function middleOfThree(a: number, b: number, c: number): number {
  return Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
}

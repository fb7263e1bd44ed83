/** The scales on which columns of a fit are uncertain: where errors are additive and intervals symmetric. */

/**
 * `linear`: the value itself. `logarithmic`: positive by construction, errors are ratios. `reciprocal`: a ratio whose
 * denominator has additive errors, as a temperature noise/(2 friction) with a friction that is estimated as it stands; the
 * reciprocal is then the variable with additive errors, and where the denominator may be near zero, the interval is open
 * upwards.
 *
 * Source  intervals of a ratio from its denominator: Fieller, Some problems in interval estimation, J. R. Stat. Soc. B 16
 *         (1954) 175; here with the relative errors of numerator and denominator together.
 */
export type ColumnScale = 'linear' | 'logarithmic' | 'reciprocal';

/** Stands for an open end: a ratio is said to be at most so many times its estimate. */
const OPEN_END = 100;

/** How far another value is from the estimate; relative on the last two scales. */
export function measureDistance(scale: ColumnScale, estimate: number, other: number): number {
  if (scale === 'logarithmic') return Math.log(other / estimate);
  if (scale === 'reciprocal') return 1 - estimate / other;
  return other - estimate;
}

/** The value at a distance from the estimate: the inverse of `measureDistance`, up to the open end of a ratio. */
export function valueAt(scale: ColumnScale, estimate: number, distance: number): number {
  if (scale === 'logarithmic') return estimate * Math.exp(distance);
  if (scale === 'reciprocal') return estimate / Math.max(1 - distance, 1 / OPEN_END);
  return estimate + distance;
}

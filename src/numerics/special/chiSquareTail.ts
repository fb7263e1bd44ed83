/**
 * Upper tail of the chi-square distribution, accurate for many degrees of freedom too.
 *
 * Source  series and continued fraction of the incomplete gamma function: Abramowitz & Stegun, Handbook of Mathematical
 *         Functions (1964), 6.5.29 and 6.5.31; evaluation of the fraction: Lentz, Appl. Opt. 15 (1976) 668; the common
 *         factor written about x = a with Stirling's series, so that nothing large cancels: Temme, Math. Comp. 29
 *         (1975) 1109.
 */

/** Above this Stirling's series with four terms is exact to rounding. */
const STIRLING = 16;

const EPSILON = 1e-16;

/**
 * Probability that a chi-square variable exceeds a value.
 *
 * @param statistic  1 for values at or below 0
 * @param freedom  degrees of freedom, > 0, not necessarily whole
 *
 * Cost  grows with the square root of the degrees of freedom.
 */
export function chiSquareTail(statistic: number, freedom: number): number {
  if (Number.isNaN(statistic) || !(freedom > 0)) return NaN;
  if (statistic <= 0) return 1;
  if (statistic === Infinity) return 0;
  const shape = freedom / 2;
  const x = statistic / 2;
  return x < shape + 1 ? 1 - lowerSeries(shape, x) : upperFraction(shape, x);
}

/** P(a, x) = xᵃ e⁻ˣ / Γ(a + 1) · (1 + x/(a + 1) + x²/((a + 1)(a + 2)) + …). */
function lowerSeries(shape: number, x: number): number {
  let term = 1;
  let sum = 1;
  for (let n = 1; term > EPSILON * sum; n++) {
    term *= x / (shape + n);
    sum += term;
  }
  return commonFactor(shape, x) * sum;
}

/** Q(a, x) = xᵃ e⁻ˣ / Γ(a) · 1/(x + 1 − a − 1(1 − a)/(x + 3 − a − …)). */
function upperFraction(shape: number, x: number): number {
  let divisor = x + 1 - shape;
  let numerators = 1 / 1e-300;
  let denominators = 1 / divisor;
  let value = denominators;
  for (let n = 1; ; n++) {
    const weight = -n * (n - shape);
    divisor += 2;
    denominators = 1 / (weight * denominators + divisor || 1e-300);
    numerators = divisor + weight / numerators || 1e-300;
    const change = denominators * numerators;
    value *= change;
    if (Math.abs(change - 1) < 2 * EPSILON || n > 1e6) break;
  }
  return commonFactor(shape, x) * shape * value;
}

/** xᵃ e⁻ˣ / Γ(a + 1). */
function commonFactor(shape: number, x: number): number {
  if (shape < STIRLING) return (commonFactor(shape + 1, x) * (shape + 1)) / x;
  const away = (x - shape) / shape;
  const inverse = 1 / (shape * shape);
  const correction = (1 / 12 - inverse * (1 / 360 - inverse * (1 / 1260 - inverse / 1680))) / shape;
  return Math.exp(-shape * (away - Math.log1p(away)) - correction) / Math.sqrt(2 * Math.PI * shape);
}

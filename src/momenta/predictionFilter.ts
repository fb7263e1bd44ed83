/**
 * The best linear prediction of the next term of a stationary series from the L before it.
 *
 * Source  Levinson, The Wiener rms error criterion in filter design and prediction, J. Math. Phys. 25 (1946) 261;
 *         Durbin, The fitting of time-series models, Rev. Int. Statist. Inst. 28 (1960) 233.
 */

export interface PredictionFilter {
  /** Variance of the prediction error; NaN where the covariances belong to no series. */
  readonly variance: number;
  /** Length L + 1: autocorrelation Σ_i e_i e_{i+j} of the prediction-error filter e = (1, −a₁, …, −a_L). */
  readonly correlation: Float64Array;
}

/**
 * Solves the normal equations of the prediction by recursion over its order.
 *
 * @param covariances  length L + 1, lags 0 … L
 * Cost  O(L²) time.
 */
export function computePredictionFilter(covariances: Float64Array): PredictionFilter {
  const order = covariances.length - 1;
  const filter = new Float64Array(order + 1);
  const mirror = new Float64Array(order + 1);
  filter[0] = 1;
  let variance = covariances[0];
  for (let i = 1; i <= order && variance > 0; i++) {
    let sum = 0;
    for (let j = 0; j < i; j++) sum += filter[j] * covariances[i - j];
    const reflection = -sum / variance;
    for (let j = 0; j <= i; j++) mirror[j] = filter[i - j];
    for (let j = 1; j <= i; j++) filter[j] += reflection * mirror[j];
    variance *= 1 - reflection * reflection;
  }
  if (!(variance > 0)) return { variance: Number.NaN, correlation: filter };
  for (let lag = 0; lag <= order; lag++) {
    let sum = 0;
    for (let i = 0; i + lag <= order; i++) sum += filter[i] * filter[i + lag];
    mirror[lag] = sum;
  }
  return { variance, correlation: mirror };
}

/**
 * Intervals of a statement's parameters from the profile of its distance.
 *
 * With D(φ_j) = min over the other parameters of T² − T²_min, ν degrees of freedom behind the covariance and m numbers
 * that should vanish beyond the parameters, D ≤ t² (1 + T²_min/ν) ν/(ν − m) bounds the interval, t the quantile of
 * Student's t with ν − m degrees of freedom. For parameters that enter linearly this is exact (analysis of covariance
 * with the m numbers as covariates); for others it follows the curve of the distance instead of a tangent.
 *
 * Source  Rao, The theory of least squares when the parameters are stochastic and its application to the analysis of
 *         growth curves, Biometrika 52 (1965) 447; profiles: Bates & Watts, Nonlinear Regression Analysis and Its
 *         Applications (1988), ch. 6.
 */

import { studentQuantile } from '../numerics/special/student.js';
import { fitStatement, type StatementFit, type StatementProblem } from './fitStatement.js';

export interface ParameterInterval {
  readonly value: number;
  /** −Infinity or Infinity where the data set no bound on that side. */
  readonly low: number;
  readonly high: number;
}

const WIDEST = 100; // half-widths by linearisation within which a bound must be met
const ROUNDS = 40; // of halving the bracket; stops at a thousandth of the half-width

/** Intervals of all parameters, in their order. */
export function profileIntervals(
  problem: StatementProblem,
  fit: StatementFit,
  confidence: number,
): ParameterInterval[] {
  const freedom = problem.contrasts.blocks - 1;
  const left = Math.max(1, freedom - fit.freedom);
  const t = studentQuantile((1 + confidence) / 2, left);
  const limit = (t * t * (1 + fit.statistic / freedom) * freedom) / left;
  const count = fit.parameters.length;
  return Array.from(fit.parameters, (value, j) => {
    const half = Math.sqrt(limit * fit.covariance[j * count + j]);
    if (!(half > 0)) return { value, low: -Infinity, high: Infinity };
    return {
      value,
      low: findBound(problem, fit, j, limit, -half),
      high: findBound(problem, fit, j, limit, half),
    };
  });
}

/** Walks out from the estimate in growing steps until the distance passes the limit, then halves the bracket. */
function findBound(
  problem: StatementProblem,
  fit: StatementFit,
  j: number,
  limit: number,
  half: number,
): number {
  let start: Float64Array = fit.parameters;
  const rise = (value: number): number => {
    const from = start.slice();
    from[j] = value;
    const profile = fitStatement(problem, [from], j);
    if (!Number.isFinite(profile.statistic)) return Infinity;
    start = profile.parameters;
    return profile.statistic - fit.statistic;
  };
  const centre = fit.parameters[j];
  let inside = 0;
  let outside = 1;
  while (!(rise(centre + outside * half) > limit)) {
    inside = outside;
    outside *= 1.6;
    if (outside > WIDEST) return half > 0 ? Infinity : -Infinity;
  }
  for (let round = 0; round < ROUNDS && outside - inside > 1e-3 * outside; round++) {
    const middle = (inside + outside) / 2;
    if (rise(centre + middle * half) > limit) outside = middle;
    else inside = middle;
  }
  return centre + ((inside + outside) / 2) * half;
}

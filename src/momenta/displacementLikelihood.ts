/**
 * The quasi-likelihood of a motion for the displacements of one axis, with errors from the scatter of blocks.
 *
 * It is the Gaussian likelihood of each displacement given the L before it, which needs the sums of products S_j alone:
 * with the prediction-error filter e and its variance v of the model,
 *
 *     ℓ(θ) = −½ [ n log v + Σ_j (2 − δ_j0) (Σ_i e_i e_{i+j}) S_j / v ].
 *
 * Pairs of displacements run short at long lags and beside gaps. Data and model are therefore tapered alike, by
 * n_j/n_0, before filter and sums meet, so that the fit stays unbiased for short tracks and missing frames.
 *
 * Source  Whittle, Estimation and information in stationary time series, Ark. Mat. 2 (1953) 423; tapering both sides:
 *         Sykulski, Olhede, Guillaumin, Lilly & Early, The debiased Whittle likelihood, Biometrika 106 (2019) 251;
 *         sandwich: White, Maximum likelihood estimation of misspecified models, Econometrica 50 (1982) 1.
 */

import { Matrix, pseudoInverse } from 'ml-matrix';
import type { DisplacementCovariances } from './displacementCovariances.js';
import { type DisplacementModel, displacementCovariancesInto } from './displacementModels.js';
import {
  type ModelKind,
  type ParameterName,
  PARAMETERS,
  readParameter,
  withParameters,
} from './displacementParameters.js';
import { computePredictionFilter } from './predictionFilter.js';

export interface DisplacementFit {
  readonly kind: ModelKind;
  readonly model: DisplacementModel;
  /** Localization error variance s², length²; at first order less DΔ/3 for a full exposure that was not told, so it may be
   * negative. */
  readonly errorVariance: number;
  readonly logLikelihood: number;
  /** Length B: share of each block in the log-likelihood. */
  readonly blockLogLikelihoods: Float64Array;
  /** Names and values of the fitted parameters, in the order of `covariance`. */
  readonly parameters: readonly { readonly name: ParameterName; readonly value: number }[];
  /** Shape (p, p): covariance of the parameters from the scatter of blocks. */
  readonly covariance: Matrix;
}

/** c_0 … c_L of the model with its localization error, each times its weight. */
export function taperedInto(
  model: DisplacementModel,
  errorVariance: number,
  weights: Float64Array,
  out: Float64Array,
  exposure: number,
): void {
  displacementCovariancesInto(model, errorVariance, out, exposure);
  for (let lag = 0; lag < out.length; lag++) out[lag] *= weights[lag];
}

/** Prediction variance of the model and mean squared prediction error of the data in units of it. */
export function measureMisfit(
  model: Float64Array,
  target: Float64Array,
): { variance: number; misfit: number } {
  const { variance, correlation } = computePredictionFilter(model);
  let sum = correlation[0] * target[0];
  for (let lag = 1; lag < target.length; lag++) sum += 2 * correlation[lag] * target[lag];
  return { variance, misfit: sum / variance };
}

/** −½ (2 − δ_j0) ρ_j / v for every lag, and −½ log v: the log-likelihood is linear in the sums of products. */
function likelihoodWeights(tapered: Float64Array): { constant: number; slopes: Float64Array } {
  const { variance, correlation } = computePredictionFilter(tapered);
  const slopes = correlation.map((value, lag) => ((lag === 0 ? -0.5 : -1) * value) / variance);
  return { constant: -0.5 * Math.log(variance), slopes };
}

/** The fit of a model whose parameters have been found: likelihood, its share in each block, and errors. */
export function describeDisplacementFit(
  covariances: DisplacementCovariances,
  axis: number,
  kind: ModelKind,
  model: DisplacementModel,
  errorVariance: number,
  errorKnown: boolean,
  exposure: number,
): DisplacementFit {
  const { blocks, lags, pairs, totalPairs } = covariances;
  const sums = covariances.sums[axis];
  const width = lags + 1;
  const weights = totalPairs.map((count) => count / totalPairs[0]);
  const names = errorKnown ? PARAMETERS[kind].slice(0, -1) : PARAMETERS[kind];
  const values = names.map((name) => readParameter(name, model, errorVariance));
  const covariancesAt = (point: readonly number[]): Float64Array => {
    const out = new Float64Array(width);
    const changed = withParameters(names, point, model, errorVariance);
    taperedInto(changed.model, changed.errorVariance, weights, out, exposure);
    return out;
  };
  const centre = covariancesAt(values);
  const atCentre = likelihoodWeights(centre);
  const level = Math.exp(-2 * atCentre.constant);

  // Slopes along every parameter, by central differences (forward where the parameter may not go below 0).
  const gradients = names.map((name, index) => {
    const isLogarithm = name.startsWith('log');
    const step = isLogarithm ? 1e-3 : 1e-3 * level;
    const above = values.map((value, i) => (i === index ? value + step : value));
    const canGoBelow = isLogarithm || values[index] > step || model.kind.startsWith('first');
    const below = canGoBelow ? values.map((value, i) => (i === index ? value - step : value)) : values;
    const high = covariancesAt(above);
    const low = covariancesAt(below);
    const span = canGoBelow ? 2 * step : step;
    const highWeights = likelihoodWeights(high);
    const lowWeights = likelihoodWeights(low);
    return {
      covariance: high.map((value, lag) => (value - low[lag]) / span),
      constant: (highWeights.constant - lowWeights.constant) / span,
      slopes: highWeights.slopes.map((value, lag) => (value - lowWeights.slopes[lag]) / span),
    };
  });
  const p = names.length;
  const curvature = Matrix.zeros(p, p);
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) {
      let sum = 0;
      for (let lag = 0; lag < width; lag++) sum += gradients[a].covariance[lag] * gradients[b].slopes[lag];
      curvature.set(a, b, sum * totalPairs[0]);
    }
  }
  const blockLogLikelihoods = new Float64Array(blocks);
  const scatter = Matrix.zeros(p, p);
  const score = new Float64Array(p);
  for (let block = 0; block < blocks; block++) {
    const base = block * width;
    let value = pairs[base] * atCentre.constant;
    for (let lag = 0; lag < width; lag++) value += atCentre.slopes[lag] * sums[base + lag];
    blockLogLikelihoods[block] = value;
    for (let a = 0; a < p; a++) {
      let slope = pairs[base] * gradients[a].constant;
      for (let lag = 0; lag < width; lag++) slope += gradients[a].slopes[lag] * sums[base + lag];
      score[a] = slope;
    }
    for (let a = 0; a < p; a++)
      for (let b = 0; b < p; b++) scatter.set(a, b, scatter.get(a, b) + score[a] * score[b]);
  }
  let logLikelihood = 0;
  for (let block = 0; block < blocks; block++) logLikelihood += blockLogLikelihoods[block];
  return {
    kind,
    model,
    errorVariance,
    logLikelihood,
    blockLogLikelihoods,
    parameters: names.map((name, index) => ({ name, value: values[index] })),
    covariance: sandwich(curvature, scatter, blocks),
  };
}

/** H⁻¹ J H⁻¹, or H⁻¹ alone where there are too few blocks to know J; NaN where the curvature is not usable. */
function sandwich(curvature: Matrix, scatter: Matrix, blocks: number): Matrix {
  const p = curvature.rows;
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) {
      if (!Number.isFinite(curvature.get(a, b)) || !Number.isFinite(scatter.get(a, b)))
        return Matrix.zeros(p, p).fill(NaN);
    }
  }
  // Equilibrated before inversion: variances in length² and logarithms differ by orders of magnitude.
  const scale = Array.from({ length: p }, (_, a) => 1 / Math.sqrt(Math.max(curvature.get(a, a), 1e-300)));
  const balanced = Matrix.zeros(p, p);
  for (let a = 0; a < p; a++) {
    for (let b = 0; b < p; b++) {
      balanced.set(a, b, (scale[a] * scale[b] * (curvature.get(a, b) + curvature.get(b, a))) / 2);
    }
  }
  const inverse = pseudoInverse(balanced);
  for (let a = 0; a < p; a++)
    for (let b = 0; b < p; b++) inverse.set(a, b, inverse.get(a, b) * scale[a] * scale[b]);
  if (blocks < 2 * p + 4) return inverse;
  return inverse.mmul(scatter.clone().mul(blocks / (blocks - 1))).mmul(inverse);
}

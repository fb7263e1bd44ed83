/**
 * Fits one of the closed-form motions of `displacementModels` to the displacement autocovariances of one axis.
 *
 * The quasi-likelihood is the Gaussian likelihood of each displacement given the L before it. It needs the sums of
 * products S_j alone: with the prediction-error filter e and its variance v of the model,
 *
 *     ℓ(θ) = −½ [ n log v + Σ_j (2 − δ_j0) (Σ_i e_i e_{i+j}) S_j / v ].
 *
 * Pairs of displacements run short at long lags and beside gaps. Data and model are therefore tapered alike, by
 * n_j/n_0, before filter and sums meet, so that the fit stays unbiased for short tracks and missing frames. Errors come
 * from the scatter of block scores (sandwich), so they stand even where the motion is not quite the model's.
 *
 * Source  Whittle, Estimation and information in stationary time series, Ark. Mat. 2 (1953) 423; tapering both sides:
 *         Sykulski, Olhede, Guillaumin, Lilly & Early, The debiased Whittle likelihood, Biometrika 106 (2019) 251;
 *         sandwich: White, Maximum likelihood estimation of misspecified models, Econometrica 50 (1982) 1.
 */

import { Matrix, pseudoInverse } from 'ml-matrix';
import { minimizeSimplex } from '../numerics/optimize/minimizeSimplex.js';
import type { DisplacementCovariances } from './displacementCovariances.js';
import { type DisplacementModel, displacementCovariancesInto } from './displacementModels.js';
import { computePredictionFilter } from './predictionFilter.js';

export type ModelKind = DisplacementModel['kind'];

export interface DisplacementFit {
  readonly kind: ModelKind;
  readonly model: DisplacementModel;
  /** Localization error variance s², length². */
  readonly errorVariance: number;
  readonly logLikelihood: number;
  /** Length B: share of each block in the log-likelihood. */
  readonly blockLogLikelihoods: Float64Array;
  /** Names and values of the fitted parameters, in the order of `covariance`. */
  readonly parameters: readonly { readonly name: ParameterName; readonly value: number }[];
  /** Shape (p, p): covariance of the parameters from the scatter of blocks. */
  readonly covariance: Matrix;
}

export type ParameterName =
  | 'diffusion'
  | 'errorVariance'
  | 'logVelocityVariance'
  | 'logFriction'
  | 'logStiffness'
  | 'logRelaxation';

/** Parameters of each kind; the last is dropped where the localization error is known. */
const PARAMETERS: Record<ModelKind, readonly ParameterName[]> = {
  'first-free': ['diffusion', 'errorVariance'],
  'first-trapped': ['diffusion', 'logRelaxation', 'errorVariance'],
  'second-free': ['logVelocityVariance', 'logFriction', 'errorVariance'],
  'second-trapped': ['logVelocityVariance', 'logFriction', 'logStiffness', 'errorVariance'],
};

/** Starting rates per interval, from memories of 100 frames to a fraction of one. */
const RATE_STARTS = [0.01, 0.03, 0.1, 0.3, 0.8, 2].map(Math.log);
const STIFFNESS_STARTS = [1e-4, 3e-3, 0.05, 0.5, 2.5].map(Math.log);
/** Shares of the localization error in the displacement variance to start from, as angles (share = sin²). */
const SHARE_STARTS = [0.02, 0.2, 0.5, 0.9, 1.25];
const LOWEST_RATE = Math.log(2e-3); // a memory of 500 frames cannot be told from an endless one over 40 lags
const HIGHEST_RATE = Math.log(12); // nothing is left of e⁻¹² after one frame
const LOWEST_STIFFNESS = Math.log(1e-6); // below, the trap is wider than anything 40 lags can show
const HIGHEST_STIFFNESS = Math.log(9); // an undamped period of about two frames, the finest a recording can show

/** Model and error variance scaled to a displacement variance, from the coordinates of the search. */
interface Candidate {
  readonly model: DisplacementModel;
  readonly errorVariance: number;
}

/**
 * Fits a model to one axis.
 *
 * @param knownErrorVariance  s² where it is known beforehand (length²); null to estimate it
 * @returns null where the tracks carry no displacement variance at all
 */
export function fitDisplacementModel(
  covariances: DisplacementCovariances,
  axis: number,
  kind: ModelKind,
  knownErrorVariance: number | null = null,
): DisplacementFit | null {
  const { totalPairs } = covariances;
  const sampled = covariances.covariances[axis];
  const total = sampled[0];
  if (!(total > 0)) return null;
  const weights = totalPairs.map((pairs) => pairs / totalPairs[0]);
  const target = sampled.map((value, lag) => value * weights[lag]);
  const work = new Float64Array(sampled.length);

  // Without known error the overall scale is optimal in closed form; with it, the last coordinate is the scale.
  const build = (point: Float64Array): Candidate & { profiled: boolean } => {
    const last = point[point.length - 1];
    if (knownErrorVariance !== null) {
      const processVariance = total * Math.exp(last);
      return {
        ...unitModel(kind, point, processVariance),
        errorVariance: knownErrorVariance,
        profiled: false,
      };
    }
    const share = Math.sin(last) ** 2;
    return {
      ...unitModel(kind, point, total * (1 - share)),
      errorVariance: (total * share) / 2,
      profiled: true,
    };
  };
  const deviance = (point: Float64Array): number => {
    if (!isInside(kind, point)) return Infinity;
    const { model, errorVariance, profiled } = build(point);
    taperedInto(model, errorVariance, weights, work);
    const { variance, misfit } = measureMisfit(work, target);
    return Math.log(variance) + (profiled ? Math.log(misfit) + 1 : misfit);
  };

  const starts = listStarts(kind, knownErrorVariance !== null);
  const ranked = starts
    .map((point) => ({ point, value: deviance(point) }))
    .filter((start) => start.value < Infinity);
  ranked.sort((a, b) => a.value - b.value);
  if (ranked.length === 0) return null;
  let best = { point: ranked[0].point, value: ranked[0].value };
  for (const start of ranked.slice(0, 2)) {
    const found = minimizeSimplex(deviance, start.point, { edge: 0.3, tolerance: 1e-9, evaluations: 300 });
    if (found.value < best.value) best = found;
  }
  const found = build(best.point);
  taperedInto(found.model, found.errorVariance, weights, work);
  const scale = found.profiled ? measureMisfit(work, target).misfit : 1;
  const model = rescale(found.model, scale);
  const errorVariance = found.errorVariance * scale;
  return describeFit(covariances, axis, kind, model, errorVariance, knownErrorVariance !== null);
}

/** A model whose displacement variance is `variance`. */
function unitModel(kind: ModelKind, point: Float64Array, variance: number): { model: DisplacementModel } {
  const one = new Float64Array(1);
  let model: DisplacementModel;
  switch (kind) {
    case 'first-free':
      model = { kind, diffusion: 1 };
      break;
    case 'first-trapped':
      model = { kind, diffusion: 1, relaxation: Math.exp(point[0]) };
      break;
    case 'second-free':
      model = { kind, velocityVariance: 1, friction: Math.exp(point[0]) };
      break;
    case 'second-trapped':
      model = { kind, velocityVariance: 1, friction: Math.exp(point[0]), stiffness: Math.exp(point[1]) };
      break;
  }
  displacementCovariancesInto(model, 0, one);
  return { model: rescale(model, variance / one[0]) };
}

function rescale(model: DisplacementModel, factor: number): DisplacementModel {
  return model.kind === 'first-free' || model.kind === 'first-trapped'
    ? { ...model, diffusion: model.diffusion * factor }
    : { ...model, velocityVariance: model.velocityVariance * factor };
}

function isInside(kind: ModelKind, point: Float64Array): boolean {
  if (kind !== 'first-free' && !(point[0] >= LOWEST_RATE && point[0] <= HIGHEST_RATE)) return false;
  return kind !== 'second-trapped' || (point[1] >= LOWEST_STIFFNESS && point[1] <= HIGHEST_STIFFNESS);
}

function listStarts(kind: ModelKind, errorKnown: boolean): Float64Array[] {
  const lasts = errorKnown ? [-2, -0.7, -0.1] : SHARE_STARTS;
  const starts: Float64Array[] = [];
  for (const last of lasts) {
    if (kind === 'first-free') starts.push(Float64Array.of(last));
    else {
      for (const rate of RATE_STARTS) {
        if (kind !== 'second-trapped') starts.push(Float64Array.of(rate, last));
        else for (const stiffness of STIFFNESS_STARTS) starts.push(Float64Array.of(rate, stiffness, last));
      }
    }
  }
  return starts;
}

function taperedInto(
  model: DisplacementModel,
  errorVariance: number,
  weights: Float64Array,
  out: Float64Array,
): void {
  displacementCovariancesInto(model, errorVariance, out);
  for (let lag = 0; lag < out.length; lag++) out[lag] *= weights[lag];
}

/** Prediction variance of the model and mean squared prediction error of the data in units of it. */
function measureMisfit(model: Float64Array, target: Float64Array): { variance: number; misfit: number } {
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

function describeFit(
  covariances: DisplacementCovariances,
  axis: number,
  kind: ModelKind,
  model: DisplacementModel,
  errorVariance: number,
  errorKnown: boolean,
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
    taperedInto(changed.model, changed.errorVariance, weights, out);
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
    const canGoBelow = isLogarithm || values[index] > step;
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

function readParameter(name: ParameterName, model: DisplacementModel, errorVariance: number): number {
  switch (name) {
    case 'errorVariance':
      return errorVariance;
    case 'diffusion':
      return 'diffusion' in model ? model.diffusion : NaN;
    case 'logRelaxation':
      return 'relaxation' in model ? Math.log(model.relaxation) : NaN;
    case 'logVelocityVariance':
      return 'velocityVariance' in model ? Math.log(model.velocityVariance) : NaN;
    case 'logFriction':
      return 'friction' in model ? Math.log(model.friction) : NaN;
    case 'logStiffness':
      return 'stiffness' in model ? Math.log(model.stiffness) : NaN;
  }
}

function withParameters(
  names: readonly ParameterName[],
  point: readonly number[],
  model: DisplacementModel,
  errorVariance: number,
): Candidate {
  const changed: Record<string, unknown> = { ...model };
  let variance = errorVariance;
  names.forEach((name, index) => {
    const value = point[index];
    if (name === 'errorVariance') variance = value;
    else if (name === 'diffusion') changed.diffusion = value;
    else if (name === 'logRelaxation') changed.relaxation = Math.exp(value);
    else if (name === 'logVelocityVariance') changed.velocityVariance = Math.exp(value);
    else if (name === 'logFriction') changed.friction = Math.exp(value);
    else changed.stiffness = Math.exp(value);
  });
  return { model: changed as unknown as DisplacementModel, errorVariance: variance };
}

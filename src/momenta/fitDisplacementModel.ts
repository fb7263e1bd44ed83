/**
 * Fits one of the closed-form motions of `displacementModels` to the displacement autocovariances of one axis, by the
 * largest quasi-likelihood (see `displacementLikelihood`).
 */

import { minimizeSimplex } from '../numerics/optimize/minimizeSimplex.js';
import type { DisplacementCovariances } from './displacementCovariances.js';
import {
  describeDisplacementFit,
  type DisplacementFit,
  measureMisfit,
  taperedInto,
} from './displacementLikelihood.js';
import { type DisplacementModel, displacementCovariancesInto } from './displacementModels.js';
import type { ModelKind, ObservedModel } from './displacementParameters.js';

export type { ModelKind };

/** Starting rates per interval, from memories of 100 frames to a fraction of one. */
const RATE_STARTS = [0.01, 0.03, 0.1, 0.3, 0.8, 2].map(Math.log);
const STIFFNESS_STARTS = [1e-4, 3e-3, 0.05, 0.5, 2.5].map(Math.log);
/** Shares of the localization error in the displacement variance to start from, as angles (share = sin²). */
const SHARE_STARTS = [0.02, 0.2, 0.5, 0.9, 1.25];
/**
 * The same share at first order and full exposure, where motion blur puts −DΔ/3 in place of s²: displacements then have
 * the variance 4DΔ/3 (Vestergaard, Blainey & Flyvbjerg, Phys. Rev. E 89 (2014) 022726, eq. 2 and 3, with R = 1/6).
 */
const BLURRED_SHARE = -1 / 2;
const LOWEST_RATE = Math.log(2e-3); // a memory of 500 frames cannot be told from an endless one over 40 lags
const HIGHEST_RATE = Math.log(12); // nothing is left of e⁻¹² after one frame
const LOWEST_STIFFNESS = Math.log(1e-6); // below, the trap is wider than anything 40 lags can show
const HIGHEST_STIFFNESS = Math.log(9); // an undamped period of about two frames, the finest a recording can show

/**
 * Fits a model to one axis.
 *
 * Where no exposure is given, the error variance of a first-order motion is what it is less DΔ/3 for an exposure of the
 * whole frame, so it may come out negative there, and stays free even where s² is known: motion blur must not pass for a
 * remembered velocity.
 *
 * @param givenErrorVariance  s² where it is known beforehand (length²); null to estimate it
 * @param exposure  fraction of the interval a position is averaged over, 0 to 1
 * @returns null where the tracks carry no displacement variance at all
 */
export function fitDisplacementModel(
  covariances: DisplacementCovariances,
  axis: number,
  kind: ModelKind,
  givenErrorVariance: number | null = null,
  exposure = 0,
): DisplacementFit | null {
  const isFirst = kind === 'first-free' || kind === 'first-trapped';
  const mayBeBlurred = isFirst && exposure === 0;
  const knownErrorVariance = mayBeBlurred ? null : givenErrorVariance;
  const lowestShare = mayBeBlurred ? BLURRED_SHARE : 0;
  const { totalPairs } = covariances;
  const sampled = covariances.covariances[axis];
  const total = sampled[0];
  if (!(total > 0)) return null;
  const weights = totalPairs.map((pairs) => pairs / totalPairs[0]);
  const target = sampled.map((value, lag) => value * weights[lag]);
  const work = new Float64Array(sampled.length);

  // Without known error the overall scale is optimal in closed form; with it, the last coordinate is the scale.
  const build = (point: Float64Array): ObservedModel & { profiled: boolean } => {
    const last = point[point.length - 1];
    if (knownErrorVariance !== null) {
      const processVariance = total * Math.exp(last);
      return {
        ...unitModel(kind, point, processVariance, exposure),
        errorVariance: knownErrorVariance,
        profiled: false,
      };
    }
    const share = lowestShare + (1 - lowestShare) * Math.sin(last) ** 2;
    return {
      ...unitModel(kind, point, total * (1 - share), exposure),
      errorVariance: (total * share) / 2,
      profiled: true,
    };
  };
  const deviance = (point: Float64Array): number => {
    if (!isInside(kind, point)) return Infinity;
    const { model, errorVariance, profiled } = build(point);
    taperedInto(model, errorVariance, weights, work, exposure);
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
  taperedInto(found.model, found.errorVariance, weights, work, exposure);
  const scale = found.profiled ? measureMisfit(work, target).misfit : 1;
  const model = rescale(found.model, scale);
  const errorVariance = found.errorVariance * scale;
  return describeDisplacementFit(
    covariances,
    axis,
    kind,
    model,
    errorVariance,
    knownErrorVariance !== null,
    exposure,
  );
}

/** A model whose displacement variance is `variance`. */
function unitModel(
  kind: ModelKind,
  point: Float64Array,
  variance: number,
  exposure: number,
): { model: DisplacementModel } {
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
  displacementCovariancesInto(model, 0, one, exposure);
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

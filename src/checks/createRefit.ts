/** The estimator of a fit, to be used again on simulated recordings of the same design. */

import type { FitOfAnyOrigin } from '../documents/FitDocument.js';
import { unlessUnusable } from '../errors.js';
import { chooseEstimator } from '../estimation/choose.js';
import { planEstimation } from '../estimation/planEstimation.js';
import { modelParameters } from '../fields/modelParameters.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { checkTrackLengths } from '../tracks/usableTracks.js';

/**
 * A function from tracks to the coefficient vector of the fit's model: the same shapes over the same region, blocks
 * of the same length, estimated anew.
 *
 * @returns null instead of a vector where the estimator finds no answer in the tracks it is given
 */
export function createRefit(fit: FitOfAnyOrigin): (tracks: TrackSet) => Promise<Float64Array | null> {
  const { order } = fit.model;
  const { relaxationTime } = fit.survey;
  const memory = typeof relaxationTime === 'number' ? relaxationTime : null;
  const estimate = chooseEstimator(fit.study.estimator);
  const { roughnessStrengths } = fit.diagnostics;
  const start = {
    coefficients: modelParameters(fit.model),
    strengths: Array.isArray(roughnessStrengths) ? roughnessStrengths.map(Number) : [],
  };
  return async (tracks) =>
    unlessUnusable(() => {
      const usable = checkTrackLengths(tracks, order).tracks;
      const plan = planEstimation(usable, fit.study, order, memory, fit.visited);
      return modelParameters(estimate(usable, { ...plan, start, pointOnly: true }).model);
    });
}

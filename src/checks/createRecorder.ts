/** The recording, simulated again under other coefficients: what tests of small recordings draw their p-values from. */

import type { FitResult } from '../documents/FitDocument.js';
import type { Model } from '../fields/CoefficientField.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { createDesign, simulateDesign } from './simulateDesign.js';

/**
 * A function that simulates a recording with the same starts, frames and gaps under a model of the kind of the fit's.
 * To be handed to `testHypothesis` as `simulate`.
 *
 * @param tracks  the recording the fit was made from
 * @returns  a function of a model, the standard deviation of the localization error per axis (length), and the number
 *   of the simulation, which with the seed of the study decides the draws
 *
 * @example
 * const result = testHypothesis(fit, tracks, {
 *   hypothesis: 'uniform-friction',
 *   confidence: 0.95,
 *   seed: 1,
 *   simulate: createRecorder(fit, tracks),
 * });
 */
export function createRecorder(
  fit: FitResult,
  tracks: TrackSet,
): (model: Model, localizationError: readonly number[], index: number) => TrackSet {
  return (model, localizationError, index) => {
    const imposed: FitResult = {
      ...fit,
      model: model as FitResult['model'],
      localizationError: localizationError.map((value) => ({ value, low: value, high: value })),
      uncertainty: { ...fit.uncertainty, replicates: [] },
    };
    const positions = simulateDesign(
      createDesign(imposed, tracks),
      null,
      fit.study.seed,
      `test-${index}`,
      false,
    );
    return { ...tracks, positions };
  };
}

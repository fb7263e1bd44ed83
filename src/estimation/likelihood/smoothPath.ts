/** The path given everything recorded: smoothed positions and velocities under fitted coefficients. */

import { UsageError } from '../../errors.js';
import type { Model } from '../../fields/CoefficientField.js';
import { modelParameters } from '../../fields/modelParameters.js';
import { countPositions, type TrackSet } from '../../tracks/TrackSet.js';
import { createPathPass } from './createPathPass.js';
import { layOutLikelihood } from './layout.js';

/** All of shape (n, d). */
export interface SmoothedPath {
  /** Length. */
  readonly places: Float64Array;
  readonly placeVariances: Float64Array;
  /** Length/time; NaN in tracks of fewer than three positions. */
  readonly velocities: Float64Array;
  readonly velocityVariances: Float64Array;
}

/**
 * Smooths a recording.
 *
 * @param model  second order, positive by construction (as the likelihood fits it)
 * @param localizationError  standard deviation per axis (length), where the tracks bring none of their own
 * @param exposure  fraction of the sampling interval a position is averaged over
 * @throws UsageError  for a model of first order, or one whose friction or noise may turn negative
 */
export function smoothPath(
  tracks: TrackSet,
  model: Model,
  localizationError: readonly number[],
  exposure = 0,
): SmoothedPath {
  if (model.order !== 'second') {
    throw new UsageError('velocities exist at second order only; fit with --order second', {
      order: model.order,
    });
  }
  if (model.friction.link === 'identity' || model.noise.link === 'identity') {
    throw new UsageError(
      'smoothing takes a fit by --estimator likelihood, whose friction and noise are positive everywhere',
      { friction: model.friction.link, noise: model.noise.link },
    );
  }
  const layout = layOutLikelihood(model, { force: false, friction: false }, false);
  const n = countPositions(tracks);
  const setting = {
    blockOfPosition: new Int32Array(n),
    blocks: 1,
    knownError: tracks.localizationErrors ? null : localizationError,
  };
  const pass = createPathPass(tracks, layout, setting, exposure);
  const unknown = () => new Float64Array(n * layout.dimensions).fill(NaN);
  const path = {
    places: unknown(),
    placeVariances: unknown(),
    velocities: unknown(),
    velocityVariances: unknown(),
  };
  pass.run(modelParameters(model), null, path);
  return path;
}

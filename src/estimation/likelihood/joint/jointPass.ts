/**
 * The likelihood pass where axes cannot be filtered one by one, or positions are means over an exposure: a Kalman filter
 * of all states together, and its adjoint. Coefficients are read where the plain passes read them, the force is
 * linearised the same way; without mixing and without exposure the results are theirs.
 *
 * A recorded position is the mean of the path over a window that ends at its time (the shutter is open for a fraction of
 * the sampling interval): the mean since the shutter opened is one more state per axis, reset when it opens.
 *
 * Source  as for `secondOrderPass`; states that integrate what is recorded: Harvey, Forecasting, Structural Time Series
 *         Models and the Kalman Filter (1989), ch. 6.3; positions taken in one by one: Koopman & Durbin, J. Time Ser. Anal.
 *         21 (2000) 281.
 */

import type { TrackSet } from '../../../tracks/TrackSet.js';
import type { LikelihoodLayout } from '../layout.js';
import type { PassSetting, PathPass } from '../PathPass.js';
import { passOverTracks } from '../passOverTracks.js';
import { smoothJointly } from './jointAdjoint.js';
import { filterJointly } from './jointFilter.js';
import { prepareReader } from '../readCoefficients.js';
import { createJointState } from './jointState.js';

/**
 * Prepares the pass; it keeps scratch space of its own.
 *
 * @param exposure  fraction of the sampling interval; 0 for snapshots
 */
export function createJointPass(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
  exposure: number,
): PathPass {
  const state = createJointState(tracks, layout, setting, exposure);
  return passOverTracks(tracks, layout, setting, {
    fewest: state.second ? 3 : 2,
    errorVariance: state.errorVariance,
    prepare: (parameters) => prepareReader(state, parameters),
    filter: (_, start, end, observer) => filterJointly(state, start, end, observer),
    smooth: (parameters, start, end, scores, observer) =>
      smoothJointly(state, parameters, start, end, scores, observer),
  });
}

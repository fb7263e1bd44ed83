/**
 * The likelihood pass at second order, axis by axis: a Kalman filter of position and velocity whose coefficients are
 * read, step by step, where the filter expects the particle to be half a step on; and the adjoint of that filter, which
 * gives the score.
 *
 * Reading the coefficients at a place predicted from the past alone keeps the innovations a martingale difference, so
 * that the score has mean zero at the true coefficients; reading them along the smoothed path would let the future leak
 * in. The adjoint recursion is the disturbance smoother in other words: its result is the derivative of the
 * log-likelihood with the places held, by Fisher's identity the expected complete-data score.
 *
 * The first two positions of a track start the filter (diffuse velocity) and are not counted.
 *
 * Source  Kalman, J. Basic Eng. 82 (1960) 35; disturbance smoother: de Jong, J. Am. Stat. Assoc. 84 (1989) 181; scores
 *         from it: Koopman & Shephard, Biometrika 79 (1992) 823; martingale estimating functions: Bibby & Sørensen,
 *         Bernoulli 1 (1995) 17.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting, PathPass } from './PathPass.js';
import { passOverTracks } from './passOverTracks.js';
import { smoothTrack } from './secondOrderAdjoint.js';
import { filterTrack } from './secondOrderFilter.js';
import type { PassState } from './secondOrderState.js';
import { SLOPE_SIZE } from './transition.js';
import { createReader, prepareReader } from './readCoefficients.js';
import { measureCells } from './measureCells.js';
import { measureMotion } from './measureMotion.js';

const DIFFUSE = 1e4; // start variance of a velocity relative to the mean squared secant velocity

/** Prepares the pass; it keeps scratch space of its own. */
export function createSecondOrderPass(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
): PathPass {
  const d = layout.dimensions;
  const state: PassState = {
    ...createReader(layout),
    tracks,
    setting,
    diffuse: measureMotion(tracks).velocities.map((value) => DIFFUSE * value),
    cellWidths: measureCells(layout),
    slopes: new Float64Array(SLOPE_SIZE),
    filtered: new Float64Array(5 * d),
    adjoint: new Float64Array(5 * d),
    errorVariance: new Float64Array(d),
  };
  return passOverTracks(tracks, layout, setting, {
    fewest: 3,
    errorVariance: state.errorVariance,
    prepare: (parameters) => prepareReader(state, parameters),
    filter: (_, start, end, observer) => filterTrack(state, start, end, observer),
    smooth: (_, start, end, scores, observer) => smoothTrack(state, start, end, scores, observer),
  });
}

/** The scratch space that filter and adjoint of the second-order likelihood share. */

import type { TrackSet } from '../../tracks/TrackSet.js';
import type { PassSetting } from './PathPass.js';
import type { CoefficientReader } from './readCoefficients.js';

export interface PassState extends CoefficientReader {
  readonly tracks: TrackSet;
  readonly setting: PassSetting;
  /** Length d: start variance of the velocity. */
  readonly diffuse: Float64Array;
  /** Length d: finest cell of any basis along the axis. */
  readonly cellWidths: Float64Array;
  readonly slopes: Float64Array;
  /** Per axis: mean of q and v, variance of q, covariance, variance of v. */
  readonly filtered: Float64Array;
  /** Per axis: derivatives of the log-likelihood along the same five. */
  readonly adjoint: Float64Array;
  /** Length d: localization error variance, where it is the same for all positions. */
  readonly errorVariance: Float64Array;
}

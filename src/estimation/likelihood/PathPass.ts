/** One pass over all tracks: the quasi-log-likelihood of a parameter vector and, where wanted, its scores by block. */

export interface PathPass {
  /**
   * @param parameters  length p, as laid out by `layOutLikelihood`
   * @param scores  shape (B, p), filled with the score of each block; null for the log-likelihood alone
   * @returns log-likelihood (up to a constant)
   */
  run(parameters: Float64Array, scores: Float64Array | null, observer?: PathObserver): number;
}

/** What a pass can tell of the path besides its likelihood. */
export interface PathObserver {
  /** Innovation over its standard deviation, per row and axis; NaN where a position starts the filter. */
  readonly innovations?: Float64Array;
  /** Variance of the innovation, localization error included, length²; NaN where there is none. */
  readonly innovationVariances?: Float64Array;
  /** Smoothed velocity per row and axis, length/time; NaN at first order. */
  readonly velocities?: Float64Array;
  /** Its posterior variance, length²/time². */
  readonly velocityVariances?: Float64Array;
  /** Smoothed position per row and axis, length. */
  readonly places?: Float64Array;
  /** Its posterior variance, length². */
  readonly placeVariances?: Float64Array;
}

/** What a pass needs to know besides the layout. */
export interface PassSetting {
  /** Length n: block of each position. */
  readonly blockOfPosition: Int32Array;
  readonly blocks: number;
  /** Standard deviation of the localization error per axis, length; null where it is a parameter or comes per point. */
  readonly knownError: readonly number[] | null;
}

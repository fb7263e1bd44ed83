/**
 * What every estimator takes and gives back: tracks in, a parameter vector with block contributions out.
 */

import type { Warning } from '../errors.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldForm, Model } from '../fields/CoefficientField.js';
import type { ReportShare } from '../numerics/ReportShare.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import type { Blocks } from './blocks.js';

/** Which functions and which form a coefficient has; a null basis means the coefficient is zero. */
export interface FieldPlan {
  readonly basis: BasisSpec | null;
  readonly form: FieldForm;
  /**
   * `light`: a roughness penalty so weak that smooth averages of the coefficient are free of smoothing bias, yet
   * functions that hardly any data reach are held in place (tests of hypotheses ask for this); no bias is accounted
   * for. Default: penalised with a strength chosen from the data.
   */
  readonly smoothing?: 'penalized' | 'light';
}

/** What to estimate. At first order `force` plans the drift, `noise` the diffusion, and `friction` is unused. */
export interface EstimationPlan {
  readonly order: 'first' | 'second';
  readonly force: FieldPlan;
  readonly friction: FieldPlan;
  readonly noise: FieldPlan;
  /** Standard deviation per axis (length), or null: estimated. */
  readonly localizationError: readonly number[] | null;
  /** Fraction of the sampling interval a position is averaged over. */
  readonly exposure: number;
  readonly blocks: Blocks;
  /** Where an iterative estimator may start, where a good place is known: coefficients in the order of
   * `modelParameters`, and roughness strengths as its diagnostics give them. It changes the way, not the answer. */
  readonly start?: { readonly coefficients: ArrayLike<number>; readonly strengths: readonly number[] };
  /** Whether only the estimate counts, and not how sure it is: effects of blocks may then be rough. Default: no. */
  readonly pointOnly?: boolean;
  /** Is told how far an iterative estimator has come. */
  readonly onProgress?: ReportShare;
}

export interface Estimate {
  readonly model: Model;
  /** Raw parameters of the estimator, length p: what blocks contribute to. */
  readonly parameters: Float64Array;
  /** Shape (B, p): first-order effect of each block on the raw parameters. */
  readonly influences: Float64Array;
  /** Smoothing bias of the raw parameters as a random effect: bias = values · standard normals; shape (p, columns). */
  readonly smoothingFactor: { readonly values: Float64Array; readonly columns: number } | null;
  /** Turns raw parameters into the coefficient vector of the model (order of `modelParameters`). */
  toModelParameters(parameters: Float64Array): Float64Array;
  /** Standard deviation of the localization error per axis and its standard error, length. */
  readonly localizationError: readonly { readonly value: number; readonly standardError: number }[];
  readonly diagnostics: Readonly<Record<string, number | string | boolean | readonly number[]>>;
  readonly warnings: readonly Warning[];
}

export type Estimator = (tracks: TrackSet, plan: EstimationPlan) => Estimate;

/** What `surveyTracks` says of a recording: plain numbers, arrays and strings, fit for JSON as they stand. */

import type { Warning } from '../errors.js';
import type { PrecisionBound } from './precisionBound.js';
import type { Recording } from './describeRecording.js';

export interface Survey extends Recording {
  readonly dimensions: number;
  readonly coordinates: string[];
  /** Time between neighbouring frames. */
  readonly interval: number;
  /** Per axis: lowest and highest coordinate, length (unwrapped on periodic axes). */
  readonly extent: { readonly low: number[]; readonly high: number[] };
  /** The visited region in short: cells of the grid, how many count as visited, entries per coarse cell. */
  readonly visited: {
    readonly cells: number;
    readonly visitedCells: number;
    readonly medianVisits: number;
    /** Share of the positions in places entered fewer than five times, 0 to 1. */
    readonly rareShare: number;
  };
  /** Per axis: root mean square displacement per frame, localization error included, length. */
  readonly displacementPerFrame: number[];
  /** Per axis: pooled displacement autocovariance from lag 0 on, length². */
  readonly displacementCovariances: number[][];
  /** Per axis: standard deviation of the localization error, length; 0 where the tracks do not move at all. */
  readonly localizationError: number[];
  /** Per axis: its standard error; null where known beforehand or not estimable. */
  readonly localizationErrorStandardError: (number | null)[];
  readonly localizationErrorSource: 'estimated' | 'given' | 'table';
  /** Localization error over the thermal displacement per frame (second order) or over √(2DΔ) (first order). */
  readonly errorOverDisplacement: (number | null)[];
  /** Relaxation time of the velocity, 1/friction; null where no velocity memory is resolved. */
  readonly relaxationTime: number | null;
  readonly relaxationTimeInterval: {
    readonly low: number;
    readonly high: number;
    readonly level: number;
  } | null;
  /** Friction × sampling interval, dimensionless; null with the relaxation time. */
  readonly frictionTimesInterval: number | null;
  /** Per axis: variance of the velocity (kinetic temperature per mass), length²/time²; null where not resolved. */
  readonly velocityVariance: (number | null)[];
  readonly velocityVarianceStandardError: (number | null)[];
  /** Per axis: square root of the velocity variance, length/time. */
  readonly thermalSpeed: (number | null)[];
  /** Per axis: diffusion at first order, or that of the free second-order motion (T/Γ), length²/time. */
  readonly diffusion: (number | null)[];
  /** Per axis: whether the displacements show the pull of a trap. */
  readonly trapped: boolean[];
  /** Slope of log mean squared displacement against log lag over those lags (frames); null with too few of them. */
  readonly spreadingExponent: {
    readonly value: number;
    readonly fromLag: number;
    readonly toLag: number;
  } | null;
  /** Per axis: mean velocity over all tracks and its standard error, length/time. */
  readonly meanVelocity: number[];
  readonly meanVelocityStandardError: number[] | null;
  readonly recommendedOrder: 'first' | 'second';
  /** Log-likelihood by which a remembered velocity explains the displacements better, and in standard errors. */
  readonly memoryEvidence: { readonly gain: number; readonly standardErrors: number | null };
  /** Smallest relative standard deviations to expect for constant coefficients; null at first order. */
  readonly expectedPrecision: PrecisionBound | null;
  /** Tracks that hardly move compared with the others. */
  readonly immobileTracks: number;
  /** Steps that look like wrong links. */
  readonly suspectJumps: number;
  /** Correlation of what different tracks do at the same time; null where too few are simultaneous. */
  readonly commonDriftCorrelation: number | null;
  /** The same in the standard errors it has for independent tracks. */
  readonly commonDriftStandardErrors: number | null;
  /** Probability of a correlation as large for independent tracks. */
  readonly commonDriftChance: number | null;
  readonly warnings: Warning[];
}

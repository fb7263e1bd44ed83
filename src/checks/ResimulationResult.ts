/**
 * What a re-simulation says: the recording against simulated recordings of the fitted model, statistic by statistic,
 * and the series behind the pictures. Plain data: what `resimulate --json` prints and the report draws.
 */

import type { Warning } from '../errors.js';

/** One number that measures how the data set differs from what the model gives. */
export interface ResimulationStatistic {
  /** Stable name, e.g. `occupancy`, `velocity-distribution`, `mean-squared-displacement`. */
  readonly name: string;
  /** What it measures, in words for people. */
  readonly title: string;
  /** Value for the recording. */
  readonly recorded: number;
  /** 2.5 % and 97.5 % points of the simulated values. */
  readonly low: number;
  readonly high: number;
  /** Simulated p-value of this statistic alone, (1 + #)/(R + 1). */
  readonly p: number;
  /** The same, corrected for the number of statistics looked at. */
  readonly adjusted: number;
}

/** A coefficient put into the simulation and what the same estimator got back from the simulated tracks. */
export interface RefitCoefficient {
  /** Field, component and number of the basis function, e.g. `friction_xx[3]`. */
  readonly name: string;
  readonly putIn: number;
  /** Mean over the refitted replicates. */
  readonly refitted: number;
  /** Standard error of that mean; null with fewer than two refits. */
  readonly standardError: number | null;
}

/** What a series describes; each is one small picture. */
export type ResimulationSeriesKind =
  | 'occupancy'
  | 'speed'
  | 'displacement'
  | 'mean-squared-displacement'
  | 'velocity-autocorrelation'
  | 'kinetic-temperature'
  | 'residence-time'
  | 'first-passage-time';

/** A curve of the recording with the band of the simulated ones; all arrays have one length. */
export interface ResimulationSeries {
  readonly kind: ResimulationSeriesKind;
  /** Unique, e.g. `occupancy-x`, `displacement-4` (lag in frames). */
  readonly name: string;
  /** Heading for people. */
  readonly title: string;
  /** Coordinate number where the series belongs to one axis, else null. */
  readonly axis: number | null;
  /** What runs along each direction, with units where they are known, ready for axis labels. */
  readonly xLabel: string;
  readonly yLabel: string;
  /** Places of the values: bin centres, or lags in time units. */
  readonly x: readonly number[];
  /** The recording; null where it says nothing (an empty bin). */
  readonly recorded: readonly (number | null)[];
  /** 2.5 %, 50 % and 97.5 % points of the simulated curves at each x; null where no replicate has a value. */
  readonly low: readonly (number | null)[];
  readonly median: readonly (number | null)[];
  readonly high: readonly (number | null)[];
}

/** A mean residence or first-passage time. */
export interface ResimulationTime {
  /** As in the statistics: `residence-time:left`, `first-passage-time:left-right`. */
  readonly name: string;
  /** Time; null where no end was seen. */
  readonly recorded: number | null;
  /** Ends seen in the recording. */
  readonly events: number;
  /** 2.5 %, 50 % and 97.5 % points of the simulated means; null where a simulation saw no end. */
  readonly low: number | null;
  readonly median: number | null;
  readonly high: number | null;
}

export interface ResimulationResult {
  readonly replicates: number;
  readonly seed: number;
  readonly statistics: readonly ResimulationStatistic[];
  /** Mean residence and first-passage times; empty where no region was given. */
  readonly times: readonly ResimulationTime[];
  /** Empty where no refit was asked for. */
  readonly refit: readonly RefitCoefficient[];
  /** Joint p-value of all statistics together. */
  readonly p: number;
  /** Level of the verdict: a right model is called inconsistent in at most this share of studies. */
  readonly level: number;
  readonly consistent: boolean;
  readonly series: readonly ResimulationSeries[];
  readonly warnings: readonly Warning[];
}

/** The estimators by name. */

import { DataError, NumericalError, UsageError, type Warning } from '../errors.js';
import { countPositions, countTracks, type TrackSet } from '../tracks/TrackSet.js';
import { estimateDifferences } from './differences/estimateDifferences.js';
import type { Estimator } from './Estimate.js';
import { estimateLikelihood } from './likelihood/estimateLikelihood.js';
import { estimateKernel } from './kernel/estimateKernel.js';

const ESTIMATORS: Readonly<Record<string, Estimator>> = {
  likelihood: estimateLikelihood,
  differences: estimateDifferences,
  kernel: estimateKernel,
};

/**
 * The estimator of that name. Where it finds no answer because the tracks do not determine the coefficients, it throws
 * a DataError that says so.
 *
 * @throws UsageError  for a name that is not known
 */
export function chooseEstimator(name: string): Estimator {
  if (!Object.hasOwn(ESTIMATORS, name)) {
    throw new UsageError(
      `--estimator "${name}" is not available; use ${Object.keys(ESTIMATORS).join(' or ')}`,
      {
        option: '--estimator',
        value: name,
      },
    );
  }
  const estimate = ESTIMATORS[name];
  return (tracks, plan) => {
    try {
      const found = estimate(tracks, plan);
      return { ...found, warnings: [...found.warnings, ...warnOfFewNumbers(tracks)] };
    } catch (error) {
      throw error instanceof NumericalError ? undetermined(error, tracks) : error;
    }
  };
}

/** Below, intervals from resampling hold the truth less often than they say (measured: see DEVELOPERS.md). */
const ENOUGH_NUMBERS = 150;

/** The first two positions of a track tell where it starts and how; each of the others is one number per axis. */
function warnOfFewNumbers(tracks: TrackSet): Warning[] {
  const numbers = tracks.dimensions * (countPositions(tracks) - 2 * countTracks(tracks));
  if (numbers >= ENOUGH_NUMBERS) return [];
  return [
    {
      code: 'few-positions',
      message: `the fit rests on ${numbers} numbers (positions beyond the first two of each track, times axes); the intervals are too narrow with so few, so take them as a lower limit of the uncertainty`,
    },
  ];
}

function undetermined(error: NumericalError, tracks: TrackSet): DataError {
  const positions = countPositions(tracks);
  const count = countTracks(tracks);
  return new DataError(
    `${count === 1 ? 'one track' : `${count} tracks`} of ${positions} positions in all cannot carry this fit: ${error.message}, ` +
      'or record more and longer tracks',
    { ...error.facts, tracks: count, positions },
  );
}

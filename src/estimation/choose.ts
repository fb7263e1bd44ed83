/** The estimators by name. */

import { UsageError } from '../errors.js';
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
 * The estimator of that name.
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
  return ESTIMATORS[name];
}

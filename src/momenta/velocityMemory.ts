/**
 * Whether velocities are remembered between frames: first-order and second-order motions, free and trapped, compete
 * for the displacement autocovariances of every axis.
 *
 * Localization error alone gives a displacement covariance of −s² at lag 1 and none beyond, and a first-order motion
 * in a trap gives negative ones; only a remembered velocity makes them positive. The second-order motions must win by
 * more than their extra parameters cost, and by more than the scatter of blocks allows by chance (Vuong, Likelihood
 * ratio tests for model selection and non-nested hypotheses, Econometrica 57 (1989) 307).
 */

import type { DisplacementCovariances } from './displacementCovariances.js';
import type { DisplacementFit } from './displacementLikelihood.js';
import type { ModelKind } from './displacementParameters.js';
import { fitDisplacementModel } from './fitDisplacementModel.js';

export interface VelocityMemory {
  /** Best first-order fit per axis; null where an axis does not move. */
  readonly first: readonly (DisplacementFit | null)[];
  /** Best second-order fit per axis. */
  readonly second: readonly (DisplacementFit | null)[];
  /** Log-likelihood the second order wins over the first, all axes, net of the cost of parameters. */
  readonly gain: number;
  /** The same in standard errors from the scatter of blocks. */
  readonly standardErrors: number;
  /** Whether the memory stands out beyond doubt. */
  readonly resolved: boolean;
  /** log(friction × interval), pooled over axes by precision, and its standard error; null unless resolved. */
  readonly logFriction: { readonly value: number; readonly error: number } | null;
}

const PARAMETER_COST = 3; // log-likelihood per parameter: about half the logarithm of some hundred independent pieces
const SMALLEST_GAIN = 3; // odds of e³ ≈ 20 to 1
const SMALLEST_STANDARD_ERRORS = 2;
const LARGEST_LOG_ERROR = 0.8; // a friction known to less than a factor of e^0.8 ≈ 2 is not resolved

/**
 * Lets the motions compete on every axis.
 *
 * @param exposure  fraction of the interval a position is averaged over, 0 to 1
 */
export function estimateVelocityMemory(
  covariances: DisplacementCovariances,
  knownErrorVariances: readonly (number | null)[],
  exposure = 0,
): VelocityMemory {
  const first: (DisplacementFit | null)[] = [];
  const second: (DisplacementFit | null)[] = [];
  const differences = new Float64Array(covariances.blocks);
  let gain = 0;
  for (let axis = 0; axis < covariances.dimensions; axis++) {
    const known = knownErrorVariances[axis];
    const enough = covariances.lags >= 2; // three numbers are needed to tell memory from localization error
    first.push(fitBest(covariances, axis, ['first-free', 'first-trapped'], known, exposure));
    second.push(
      enough ? fitBest(covariances, axis, ['second-free', 'second-trapped'], known, exposure) : null,
    );
    const a = first[axis];
    const b = second[axis];
    if (a === null || b === null) continue;
    gain += b.logLikelihood - a.logLikelihood - PARAMETER_COST * (b.parameters.length - a.parameters.length);
    for (let block = 0; block < covariances.blocks; block++) {
      differences[block] += b.blockLogLikelihoods[block] - a.blockLogLikelihoods[block];
    }
  }
  const standardErrors = gain / spreadOfSum(differences);
  const stands = gain > SMALLEST_GAIN && !(standardErrors < SMALLEST_STANDARD_ERRORS);
  const logFriction = stands ? poolLogFriction(second) : null;
  return { first, second, gain, standardErrors, resolved: stands, logFriction };
}

/** The likeliest of the kinds after the cost of parameters; listed from simple to rich. */
function fitBest(
  covariances: DisplacementCovariances,
  axis: number,
  kinds: readonly ModelKind[],
  known: number | null,
  exposure: number,
): DisplacementFit | null {
  let best: DisplacementFit | null = null;
  let bestScore = -Infinity;
  for (const kind of kinds) {
    const fit = fitDisplacementModel(covariances, axis, kind, known, exposure);
    if (fit === null) continue;
    const score = fit.logLikelihood - PARAMETER_COST * fit.parameters.length;
    if (score > bestScore) {
      best = fit;
      bestScore = score;
    }
  }
  return best;
}

/** Standard deviation of the sum of independent block differences; NaN with a single block. */
function spreadOfSum(differences: Float64Array): number {
  const n = differences.length;
  if (n < 2) return NaN;
  let mean = 0;
  for (let i = 0; i < n; i++) mean += differences[i] / n;
  let squares = 0;
  for (let i = 0; i < n; i++) squares += (differences[i] - mean) ** 2;
  return Math.sqrt((squares * n) / (n - 1));
}

function poolLogFriction(fits: readonly (DisplacementFit | null)[]): { value: number; error: number } | null {
  let weightSum = 0;
  let sum = 0;
  for (const fit of fits) {
    if (fit === null) continue;
    const index = fit.parameters.findIndex((parameter) => parameter.name === 'logFriction');
    const variance = fit.covariance.get(index, index);
    if (!(variance > 0) || !Number.isFinite(variance)) continue;
    weightSum += 1 / variance;
    sum += fit.parameters[index].value / variance;
  }
  const error = 1 / Math.sqrt(weightSum);
  return weightSum > 0 && error < LARGEST_LOG_ERROR ? { value: sum / weightSum, error } : null;
}

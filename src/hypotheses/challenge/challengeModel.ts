/** Tries the model's own assumptions against the data, one check after another. */

import type { FitResult } from '../../documents/FitDocument.js';
import type { Warning } from '../../errors.js';
import type { ReportShare } from '../../numerics/ReportShare.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { ChallengeResult, Check } from './ChallengeResult.js';
import { checkGaussianity } from './checkGaussianity.js';
import { checkIndependence } from './checkIndependence.js';
import { checkJumps } from './checkJumps.js';
import { checkMemory } from './checkMemory.js';
import { checkSpeedDependence } from './checkSpeedDependence.js';
import { checkStationarity } from './checkStationarity.js';
import { type Finding, isSkipped, type Skipped } from './Finding.js';
import { measureInnovations } from './innovations.js';

/**
 * Challenges a fit.
 *
 * Each check comes with its own p-value and with one that is corrected for their number (Holm, A simple sequentially
 * rejective multiple test procedure, Scand. J. Stat. 6 (1979) 65): in a right model any of the assumptions is called
 * broken in at most 1 − confidence of studies.
 *
 * @param tracks  the recording the fit was made from
 * @param confidence  level of the verdicts
 * @param onProgress  is told how much is done
 * @throws DataError, NumericalError  as the likelihood estimator does
 *
 * @example
 * const { checks, holds } = challengeModel(fit, tracks, 0.95);
 * console.log(holds, checks.length); // → true 6
 */
export function challengeModel(
  fit: FitResult,
  tracks: TrackSet,
  confidence: number,
  onProgress?: ReportShare,
): ChallengeResult {
  const { relaxationTime } = fit.survey;
  const memory = typeof relaxationTime === 'number' ? relaxationTime : null;
  const innovations = measureInnovations(fit, tracks, onProgress);
  const results: (Finding | Skipped)[] = [
    checkMemory(innovations, memory),
    checkSpeedDependence(innovations, memory),
    checkGaussianity(innovations),
    checkStationarity(innovations, memory),
    checkIndependence(innovations),
    checkJumps(innovations),
  ];
  const findings = results.filter((result): result is Finding => !isSkipped(result));
  const corrected = correctByHolm(findings.map(({ p }) => p));
  const checks = findings.map((finding, i): Check => {
    const holds = corrected[i] >= 1 - confidence;
    return {
      name: finding.name,
      assumption: finding.assumption,
      statistic: finding.statistic,
      p: corrected[i],
      pAlone: finding.p,
      holds,
      effect: finding.effect,
      note: holds ? 'nothing speaks against it' : `${finding.found}; ${finding.advice}`,
    };
  });
  return {
    confidence,
    checks,
    skipped: results.filter(isSkipped),
    holds: checks.every((check) => check.holds),
    warnings: [...innovations.estimate.warnings, ...warnOfSimplifications(fit)],
  };
}

/** What the innovations leave out of the fit's model. */
function warnOfSimplifications(fit: FitResult): Warning[] {
  const warnings: Warning[] = [];
  const { frictionForm, noiseForm } = fit.study;
  if (noiseForm === 'matrix' || (frictionForm === 'matrix' && fit.model.order === 'second')) {
    warnings.push({
      code: 'challenged-along-axes',
      message:
        'the checks look along each axis; what the off-diagonal entries of a matrix bring about may be taken for memory',
    });
  }
  return warnings;
}

/** Holm's adjusted p-values, in the order given. */
export function correctByHolm(values: readonly number[]): number[] {
  const order = values.map((_, i) => i).sort((a, b) => values[a] - values[b]);
  const out = new Array<number>(values.length);
  let largest = 0;
  order.forEach((i, rank) => {
    largest = Math.max(largest, Math.min(1, (values.length - rank) * values[i]));
    out[i] = largest;
  });
  return out;
}

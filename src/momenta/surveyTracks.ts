/**
 * The survey: what was recorded, what the displacements say of velocity, localization error and order, and whether
 * that can carry a fit.
 */

import { fitStraightLine } from '../numerics/linear/plainRegression.js';
import type { ReportShare } from '../numerics/ReportShare.js';
import { countPositions, type TrackSet } from '../tracks/TrackSet.js';
import { meanErrorVariances } from '../tracks/meanErrorVariances.js';
import { describeVisited, measureVisitedShare } from '../tracks/visitedRegion.js';
import { estimateCommonDrift } from './commonDrift.js';
import { countVisits } from './countVisits.js';
import { describeRecording } from './describeRecording.js';
import { type DisplacementCovariances, estimateDisplacementCovariances } from './displacementCovariances.js';
import type { DisplacementFit } from './displacementLikelihood.js';
import type { ParameterName } from './displacementParameters.js';
import { countImmobileTracks } from './immobileTracks.js';
import { frictionPrecisionBound, type PrecisionBound } from './precisionBound.js';
import type { Survey } from './Survey.js';
import { findSuspectJumps } from './suspectJumps.js';
import { estimateVelocityMemory, type VelocityMemory } from './velocityMemory.js';
import { warnOfRecording } from './warnOfRecording.js';

export interface SurveyOptions {
  /** Standard deviation of the localization error where it is known beforehand, length; default: estimated. */
  readonly localizationError?: number | 'auto';
  /** Fraction of the interval a position is averaged over, 0 to 1; default 0. */
  readonly exposure?: number;
  /** Is told how much is done. */
  readonly onProgress?: ReportShare;
}

const LEVEL = 0.95;
const NORMAL_QUANTILE = 1.959964; // of LEVEL, two-sided
// Friction × interval at which e⁻³ = 5 % of a velocity is left: too little to measure it by, and diffusion at first
// order is right to 2 %. Values nearer than their standard error count as beyond, or chance would pick the order.
const FORGOTTEN = 3;

/**
 * Surveys a recording.
 *
 * The displacement autocovariances of each axis are fitted by free and trapped motions of first and second order (see
 * `velocityMemory`); everything about velocities and localization error comes from the winning order.
 *
 * @param tracks  any tracks; those that do not move at all are described without velocities
 * @returns plain numbers, arrays and strings, in the units of the tracks
 *
 * @example
 * const survey = surveyTracks(tracks);
 * console.log(survey.recommendedOrder, survey.missingFrames); // → second 0
 * console.log(survey.warnings.map(({ code }) => code)); // → []
 */
export function surveyTracks(tracks: TrackSet, options: SurveyOptions = {}): Survey {
  const { dimensions, samplingInterval: interval } = tracks;
  const tell = options.onProgress ?? (() => {});
  const recording = describeRecording(tracks);
  const visited = describeVisited(tracks);
  tell(0.2);
  const covariances = estimateDisplacementCovariances(tracks);
  tell(0.4);
  const known = listKnownErrors(tracks, options.localizationError ?? 'auto');
  const memory = estimateVelocityMemory(covariances, known.variances, options.exposure ?? 0);
  const { logFriction: found } = memory;
  const logFriction = found !== null && found.value + found.error < Math.log(FORGOTTEN) ? found : null;
  const order = logFriction === null ? 'first' : 'second';
  const fits = order === 'second' ? memory.second : memory.first;
  const frictionTimesInterval = logFriction === null ? null : Math.exp(logFriction.value);
  tell(0.5);
  const drift = estimateCommonDrift(tracks, covariances);
  tell(0.7);
  const axes = fits.map((fit, axis) => describeAxis(fit, known.variances[axis], interval));
  const visits = countVisits(tracks, visited);
  tell(0.8);
  const survey: Omit<Survey, 'warnings'> = {
    ...recording,
    dimensions,
    coordinates: [...tracks.coordinates],
    interval,
    extent: { low: [...visited.low], high: [...visited.high] },
    visited: {
      cells: visited.counts.length,
      visitedCells: Math.round(measureVisitedShare(visited) * visited.counts.length),
      medianVisits: visits.medianVisits,
      rareShare: visits.rareShare,
    },
    displacementPerFrame: covariances.covariances.map((values, axis) =>
      Math.sqrt(Math.max(finite(values[0]) + covariances.meanDisplacement[axis] ** 2, 0)),
    ),
    displacementCovariances: covariances.covariances.map((values) => Array.from(values, finite)),
    localizationError: axes.map((axis) => axis.localizationError),
    localizationErrorStandardError: axes.map((axis) => axis.localizationErrorStandardError),
    localizationErrorSource: known.source,
    errorOverDisplacement: axes.map((axis) => axis.errorOverDisplacement),
    relaxationTime: frictionTimesInterval === null ? null : interval / frictionTimesInterval,
    relaxationTimeInterval: findRelaxationInterval(logFriction, interval),
    frictionTimesInterval,
    velocityVariance: axes.map((axis) => axis.velocityVariance),
    velocityVarianceStandardError: axes.map((axis) => axis.velocityVarianceStandardError),
    thermalSpeed: axes.map(({ velocityVariance }) =>
      velocityVariance === null ? null : Math.sqrt(velocityVariance),
    ),
    diffusion: axes.map((axis) => axis.diffusion),
    trapped: fits.map((fit) => fit?.kind === 'first-trapped' || fit?.kind === 'second-trapped'),
    spreadingExponent: estimateSpreadingExponent(
      covariances,
      axes.map((axis) => axis.localizationError),
    ),
    meanVelocity: [...drift.meanVelocity],
    meanVelocityStandardError: drift.meanVelocityError === null ? null : [...drift.meanVelocityError],
    recommendedOrder: order,
    memoryEvidence: describeEvidence(memory),
    expectedPrecision: boundPrecision(
      frictionTimesInterval,
      axes.map((axis) => axis.errorOverDisplacement),
      countPositions(tracks),
      known.source !== 'estimated',
    ),
    immobileTracks: countImmobileTracks(
      tracks,
      frictionTimesInterval === null ? null : interval / frictionTimesInterval,
    ),
    suspectJumps: findSuspectJumps(tracks).length,
    commonDriftCorrelation: drift.correlation,
    commonDriftStandardErrors: drift.standardErrors,
    commonDriftChance: drift.chance,
  };
  tell(1);
  return { ...survey, warnings: warnOfRecording(survey) };
}

/** Localization error variances that need no estimate: given by the user, or the mean of the table's own. */
function listKnownErrors(
  tracks: TrackSet,
  given: number | 'auto',
): { source: Survey['localizationErrorSource']; variances: (number | null)[] } {
  const { dimensions } = tracks;
  if (given !== 'auto') {
    return { source: 'given', variances: new Array<number>(dimensions).fill(given * given) };
  }
  const variances = meanErrorVariances(tracks);
  return variances
    ? { source: 'table', variances: Array.from(variances) }
    : { source: 'estimated', variances: new Array<null>(dimensions).fill(null) };
}

interface AxisFacts {
  readonly localizationError: number;
  readonly localizationErrorStandardError: number | null;
  readonly errorOverDisplacement: number | null;
  readonly velocityVariance: number | null;
  readonly velocityVarianceStandardError: number | null;
  readonly diffusion: number | null;
}

/** What the fit of one axis says, from units of the interval to those of the tracks. */
function describeAxis(fit: DisplacementFit | null, known: number | null, interval: number): AxisFacts {
  const errorVariance = known ?? Math.max(fit?.errorVariance ?? 0, 0);
  const localizationError = Math.sqrt(errorVariance);
  const nothing = {
    localizationError,
    localizationErrorStandardError: null,
    errorOverDisplacement: null,
    velocityVariance: null,
    velocityVarianceStandardError: null,
    diffusion: null,
  };
  if (fit === null) return nothing;
  const varianceError = known === null ? readStandardError(fit, 'errorVariance') : null;
  // Near zero the root bends: half the way from √max(0, s² − δ) to √(s² + δ) stands for δ/2s there.
  const localizationErrorStandardError =
    varianceError === null
      ? null
      : (Math.sqrt(errorVariance + varianceError) - Math.sqrt(Math.max(errorVariance - varianceError, 0))) /
        2;
  const { model } = fit;
  if (model.kind === 'first-free' || model.kind === 'first-trapped') {
    return {
      ...nothing,
      localizationErrorStandardError,
      errorOverDisplacement: ratio(localizationError, Math.sqrt(2 * model.diffusion)),
      diffusion: model.diffusion / interval,
    };
  }
  const relativeError = readStandardError(fit, 'logVelocityVariance');
  const velocityVariance = model.velocityVariance / interval ** 2;
  return {
    localizationError,
    localizationErrorStandardError,
    errorOverDisplacement: ratio(localizationError, Math.sqrt(model.velocityVariance)),
    velocityVariance,
    velocityVarianceStandardError: relativeError === null ? null : relativeError * velocityVariance,
    diffusion: model.velocityVariance / model.friction / interval,
  };
}

function readStandardError(fit: DisplacementFit, name: ParameterName): number | null {
  const index = fit.parameters.findIndex((parameter) => parameter.name === name);
  const variance = index < 0 ? NaN : fit.covariance.get(index, index);
  return variance >= 0 && Number.isFinite(variance) ? Math.sqrt(variance) : null;
}

function findRelaxationInterval(
  logFriction: VelocityMemory['logFriction'],
  interval: number,
): Survey['relaxationTimeInterval'] {
  if (logFriction === null) return null;
  const at = (sign: number): number =>
    interval / Math.exp(logFriction.value + sign * NORMAL_QUANTILE * logFriction.error);
  return { low: at(1), high: at(-1), level: LEVEL };
}

function describeEvidence(memory: VelocityMemory): Survey['memoryEvidence'] {
  const { gain, standardErrors } = memory;
  return { gain: finite(gain), standardErrors: Number.isFinite(standardErrors) ? standardErrors : null };
}

function boundPrecision(
  frictionTimesInterval: number | null,
  ratios: readonly (number | null)[],
  positions: number,
  errorKnown: boolean,
): PrecisionBound | null {
  const usable = ratios.filter((value) => value !== null);
  if (frictionTimesInterval === null || usable.length === 0) return null;
  const meanSquare = usable.reduce((sum, value) => sum + value * value, 0) / usable.length;
  return frictionPrecisionBound({
    frictionTimesInterval,
    errorOverDisplacement: Math.sqrt(meanSquare),
    positions,
    axes: usable.length,
    errorKnown: errorKnown || meanSquare === 0,
  });
}

/**
 * Slope of log(mean squared displacement) against log(lag), localization error removed, from the upper half of the lags on a
 * logarithmic scale: 1 for diffusion, 2 for straight flight, less than 1 for confinement.
 *
 * The mean squared displacement over j frames is j c₀ + 2 Σ_{i<j} (j − i) c_i of the displacement autocovariances.
 */
function estimateSpreadingExponent(
  { covariances, lags }: DisplacementCovariances,
  errors: readonly number[],
): Survey['spreadingExponent'] {
  const fromLag = Math.max(1, Math.floor(Math.sqrt(lags)));
  if (lags < 3) return null;
  const logLags: number[] = [];
  const logSpreads: number[] = [];
  for (let lag = fromLag; lag <= lags; lag++) {
    let spread = 0;
    covariances.forEach((c, axis) => {
      spread += lag * c[0] - 2 * errors[axis] ** 2;
      for (let i = 1; i < lag; i++) spread += 2 * (lag - i) * c[i];
    });
    if (!(spread > 0)) continue;
    logLags.push(Math.log(lag));
    logSpreads.push(Math.log(spread));
  }
  if (logLags.length < 3) return null;
  return { value: fitStraightLine(logLags, logSpreads).slope, fromLag, toLag: lags };
}

const finite = (value: number): number => (Number.isFinite(value) ? value : 0);

const ratio = (above: number, below: number): number | null => (below > 0 ? above / below : null);

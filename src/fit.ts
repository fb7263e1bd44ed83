/**
 * The main road: from tracks and a study to a fit with its uncertainty.
 */

import { refineFit } from './checks/refineFit.js';
import type { FitDocument, FitResult } from './documents/FitDocument.js';
import type { Study } from './documents/Study.js';
import { DataError, type Warning } from './errors.js';
import { chooseEstimator } from './estimation/choose.js';
import type { Estimate } from './estimation/Estimate.js';
import { planEstimation } from './estimation/planEstimation.js';
import { surveyTracks } from './momenta/surveyTracks.js';
import type { MapTasks } from './numerics/MapTasks.js';
import { partOf } from './numerics/ReportShare.js';
import { checkTrackLengths } from './tracks/usableTracks.js';
import { countPositions, countTracks, type TrackSet } from './tracks/TrackSet.js';
import { sampleTracks } from './tracks/sampleTracks.js';
import { describeVisited, visitedCentres } from './tracks/visitedRegion.js';
import { drawReplicates } from './uncertainty/bootstrap.js';
import { refitReplicates } from './uncertainty/refitBootstrap.js';
import { warnOfSigns } from './uncertainty/signs.js';
import { measureSpread, pointwiseMultiplier, simultaneousMultiplier } from './uncertainty/spread.js';

export type { FitResult };

/** What the caller supplies besides tracks and study; all of it optional. */
export interface FitContext {
  /** Runs independent pieces of work, such as the simulations behind `refine`; default: one after another. */
  readonly mapTasks?: MapTasks;
  /** Is told how much of the work is done, and what is done now. */
  readonly onProgress?: (done: number, total: number, stage: string) => void;
}

/** Replicates behind simultaneous bands: their quantile needs more draws than a standard deviation does. */
const BAND_REPLICATES = 1000;

/** Of the time, with `refine`: the fit itself, before it is simulated and fitted again. */
const FIT_SHARE = 0.1;

/** Share of the recordings drawn that must be possible to fit, with full refits. */
const FEWEST_REPLICATES = 0.8;

/** Digits kept of stored replicates; their own scatter is some per cent. */
const REPLICATE_DIGITS = 7;

/**
 * Fits a model to tracks.
 *
 * @param tracks  at least one track of 3 (first order) or 4 (second order) positions
 * @param study  the resolved study; `studySchema.parse({})` gives the defaults
 * @returns everything the fit file holds, in the units of the tracks; the same tracks, study and seed give the same
 *          result
 * @throws DataError  where the tracks cannot carry the fit
 * @throws UsageError  where the study asks for something impossible
 *
 * @example
 * const study = studySchema.parse({ force: 'linear', friction: 'constant', noise: 'constant', seed: 7 });
 * const fit = await fitTracks(tracks, study);
 * console.log(fit.model.order, fit.warnings.length); // → second 0
 */
export async function fitTracks(
  tracks: TrackSet,
  study: Study,
  context: FitContext = {},
): Promise<FitResult> {
  const share = study.refine ? FIT_SHARE : 1;
  const progress = (done: number, stage: string): void => context.onProgress?.(share * done, 1, stage);
  // Shares of the time, as fits of some ten thousand positions spend it.
  progress(0, 'surveying');
  const survey = surveyTracks(tracks, {
    localizationError: study.localizationError,
    exposure: study.exposure,
  });
  const order = study.order === 'auto' ? survey.recommendedOrder : study.order;
  const { tracks: usable, warnings: lengthWarnings } = checkTrackLengths(tracks, order);
  const visited = describeVisited(usable);

  progress(0.05, 'estimating');
  const plan = planEstimation(usable, study, order, survey.relaxationTime, visited);
  const tellEstimating = partOf((way) => progress(way, 'estimating'), 0.05, 0.85);
  const estimate = chooseEstimator(study.estimator)(usable, { ...plan, onProgress: tellEstimating });

  progress(0.85, 'resampling');
  const drawn =
    study.bootstrap === 'refit'
      ? await refitReplicates(usable, plan, study.estimator, estimate, study.replicates, study.seed, {
          mapTasks: context.mapTasks,
          onProgress: partOf((way) => progress(way, 'resampling'), 0.85, 0.9),
        })
      : drawReplicates(estimate, Math.max(study.replicates, BAND_REPLICATES), study.seed);
  if (drawn.length < FEWEST_REPLICATES * study.replicates) throw tooFewRefits(drawn.length, study.replicates);
  const replicates = drawn.slice(0, study.replicates);

  progress(0.9, 'drawing bands');
  const centres = visitedCentres(visited);
  const multiplier = pointwiseMultiplier(study.confidence, plan.blocks.count, replicates.length);
  const simultaneous: Record<string, number> = {};
  const spreads = measureSpread(estimate.model, drawn, centres);
  for (const spread of spreads) {
    simultaneous[spread.name] = simultaneousMultiplier(spread, study.confidence, multiplier);
  }
  progress(1, 'done');

  const warnings: Warning[] = [
    ...survey.warnings,
    ...lengthWarnings,
    ...estimate.warnings,
    ...warnOfSigns(spreads, centres, usable.coordinates),
  ];
  const fit: FitResult = {
    study: { ...study, order },
    data: {
      tracks: countTracks(usable),
      positions: countPositions(usable),
      dimensions: usable.dimensions,
      coordinates: [...usable.coordinates],
      samplingInterval: usable.samplingInterval,
      units: { ...usable.units },
      mass: study.mass,
    },
    model: estimate.model as FitDocument['model'],
    localizationError: estimate.localizationError.map((axis) => intervalOfError(axis, multiplier)),
    uncertainty: {
      method: `${study.bootstrap === 'refit' ? 'full-refit' : 'one-step'} bootstrap over ${plan.blocks.count} ${plan.blocks.kind === 'tracks' ? 'tracks or groups of tracks' : 'stretches of tracks'}, smoothing bias included`,
      blocks: plan.blocks.count,
      confidence: study.confidence,
      multiplier,
      simultaneous,
      replicates: replicates.map((row) =>
        Array.from(row, (value) => Number(value.toPrecision(REPLICATE_DIGITS))),
      ),
    },
    visited,
    trackSample: sampleTracks(usable),
    survey: JSON.parse(JSON.stringify(survey)) as FitDocument['survey'],
    diagnostics: JSON.parse(JSON.stringify(estimate.diagnostics)) as FitDocument['diagnostics'],
    warnings,
  };
  if (!study.refine) return fit;
  return refineFit(fit, usable, {
    seed: study.seed,
    mapTasks: context.mapTasks,
    onProgress: (done, total) =>
      context.onProgress?.(FIT_SHARE + (1 - FIT_SHARE) * (done / total), 1, 'refining'),
  });
}

function tooFewRefits(found: number, wanted: number): DataError {
  return new DataError(
    `only ${found} of ${wanted} recordings drawn from this one could be fitted, so that refits say nothing of its uncertainty; use --bootstrap one-step, or simpler shapes`,
    { found, wanted },
  );
}

function intervalOfError(
  axis: Estimate['localizationError'][number],
  multiplier: number,
): { value: number; low: number; high: number } {
  const { value, standardError } = axis;
  return {
    value,
    low: Math.max(0, value - multiplier * standardError),
    high: value + multiplier * standardError,
  };
}

/** A fit document straight from tracks and a study, without survey and bootstrap: what tests of hypotheses read. */

import type { FitDocument } from '../../src/documents/FitDocument.js';
import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { chooseEstimator } from '../../src/estimation/choose.js';
import { templateModel } from '../../src/estimation/differences/estimateDifferences.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import { countPositions, countTracks, type TrackSet } from '../../src/tracks/TrackSet.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';

export interface BareFitOptions {
  readonly order: 'first' | 'second';
  readonly study?: StudyInput;
  /** Of the velocity, for the length of blocks, time. */
  readonly relaxationTime?: number | null;
  /** Whether the coefficients are estimated; without, they are zero. */
  readonly estimated?: boolean;
}

export function bareFit(tracks: TrackSet, options: BareFitOptions): FitDocument {
  const { order, relaxationTime = null, estimated = false } = options;
  const study = studySchema.parse(options.study ?? {});
  const visited = describeVisited(tracks);
  const plan = planEstimation(tracks, study, order, relaxationTime, visited);
  const estimate = estimated ? chooseEstimator(study.estimator)(tracks, plan) : null;
  const model = estimate?.model ?? templateModel(tracks, plan);
  return {
    format: 'wanderlaw-fit',
    version: 1,
    program: 'wanderlaw 0.1.0',
    created: '2025-01-01T00:00:00.000Z',
    timing: {},
    study: { ...study, order },
    sources: [],
    data: {
      tracks: countTracks(tracks),
      positions: countPositions(tracks),
      dimensions: tracks.dimensions,
      coordinates: [...tracks.coordinates],
      samplingInterval: tracks.samplingInterval,
      units: { length: null, time: null },
      mass: null,
    },
    model: model as FitDocument['model'],
    localizationError: (
      estimate?.localizationError ??
      Array.from({ length: tracks.dimensions }, () => ({ value: 0, standardError: 0 }))
    ).map(({ value, standardError }) => ({
      value,
      low: Math.max(0, value - 2 * standardError),
      high: value + 2 * standardError,
    })),
    uncertainty: {
      method: 'none',
      blocks: plan.blocks.count,
      confidence: 0.95,
      multiplier: 2,
      simultaneous: {},
      replicates: [],
    },
    visited,
    trackSample: [],
    survey: { relaxationTime },
    diagnostics: {},
    warnings: [],
  };
}

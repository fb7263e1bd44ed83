/** From tracks and a study straight to the differences estimate, for tests that need no survey or bootstrap. */

import { studySchema, type StudyInput } from '../../src/documents/Study.js';
import { estimateDifferences } from '../../src/estimation/differences/estimateDifferences.js';
import type { Estimate, EstimationPlan } from '../../src/estimation/Estimate.js';
import { planEstimation } from '../../src/estimation/planEstimation.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { describeVisited } from '../../src/tracks/visitedRegion.js';
import { evaluateColumns, planColumns } from '../../src/uncertainty/columns.js';

/** Every coefficient constant, scalar forms. */
export const CONSTANT: StudyInput = {
  force: 'constant',
  friction: 'constant',
  noise: 'constant',
  drift: 'constant',
  diffusion: 'constant',
};

/** @param relaxationTime  of the velocity, for the length of blocks; time */
export function estimateStudy(
  tracks: TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
  relaxationTime: number | null = null,
): { estimate: Estimate; plan: EstimationPlan } {
  const plan = planEstimation(
    tracks,
    studySchema.parse(input),
    order,
    relaxationTime,
    describeVisited(tracks),
  );
  return { estimate: estimateDifferences(tracks, plan), plan };
}

/** Every column of a study's estimate by name, at the given places. */
export function estimateColumns(
  tracks: TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
  places: Float64Array,
): Record<string, Float64Array> {
  const { model } = estimateStudy(tracks, input, order).estimate;
  const columns = evaluateColumns(model, places);
  return Object.fromEntries(planColumns(model).map(({ name }, index) => [name, columns[index]]));
}

export function meanOf(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** Standard deviation over n − 1. */
export function deviationOf(values: readonly number[]): number {
  const centre = meanOf(values);
  return Math.sqrt(values.reduce((sum, value) => sum + (value - centre) ** 2, 0) / (values.length - 1));
}

/** From tracks and a study straight to the kernel estimate, and the process with a bump that it is judged on. */

import { studySchema, type StudyInput } from '../../../src/documents/Study.js';
import type { Estimate, EstimationPlan, Estimator } from '../../../src/estimation/Estimate.js';
import { estimateKernel } from '../../../src/estimation/kernel/estimateKernel.js';
import { planEstimation } from '../../../src/estimation/planEstimation.js';
import type { TrackSet } from '../../../src/tracks/TrackSet.js';
import { describeVisited } from '../../../src/tracks/visitedRegion.js';
import { evaluateColumns, planColumns } from '../../../src/uncertainty/columns.js';
import { simulateVaried } from '../../support/variedProcess.js';

export function estimateWith(
  estimator: Estimator,
  tracks: TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
): { estimate: Estimate; plan: EstimationPlan } {
  const study = studySchema.parse(input);
  const plan = planEstimation(tracks, study, order, null, describeVisited(tracks));
  return { estimate: estimator(tracks, plan), plan };
}

/** Every column of the kernel estimate by name, at the given places. */
export function kernelColumns(
  tracks: TrackSet,
  input: StudyInput,
  order: 'first' | 'second',
  places: Float64Array,
): Record<string, Float64Array> {
  return columnsOf(estimateWith(estimateKernel, tracks, input, order).estimate, places);
}

export function columnsOf({ model }: Estimate, places: Float64Array): Record<string, Float64Array> {
  const columns = evaluateColumns(model, places);
  return Object.fromEntries(planColumns(model).map(({ name }, index) => [name, columns[index]]));
}

/** Friction doubled over a bump of standard deviation 5, the way covered in ten intervals across; ΓΔ 0.1 to 0.2. */
export const BUMP: Readonly<Record<string, (x: number) => number>> = {
  force_x: (x) => -0.01 * x,
  friction_xx: (x) => 0.1 * (1 + Math.exp(-(x * x) / 50)),
  noise_xx: (x) => 0.2 * (1 + 0.5 * Math.exp(-((x - 3) ** 2) / 50)),
};

/** 60 tracks of 1000 frames; localization error 0.2 of the displacement per frame. */
export function simulateBump(seed: number): TrackSet {
  return simulateVaried({
    dimensions: 1,
    tracks: 60,
    frames: 1000,
    interval: 1,
    substeps: 10,
    force: (place, out) => void (out[0] = BUMP.force_x(place[0])),
    friction: (place, out) => void (out[0] = BUMP.friction_xx(place[0])),
    noise: (place, out) => void (out[0] = BUMP.noise_xx(place[0])),
    localizationError: 0.2,
    startSpread: 10,
    warmUp: 100,
    seed,
  });
}

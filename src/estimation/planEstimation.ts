/** From a study to what an estimator has to do. */

import type { Study } from '../documents/Study.js';
import { UsageError } from '../errors.js';
import { parseShape, resolveBasis } from '../fields/shapes.js';
import { countPositions, type TrackSet } from '../tracks/TrackSet.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';
import { partitionBlocks } from './blocks.js';
import type { EstimationPlan, FieldPlan } from './Estimate.js';

/**
 * Resolves shapes, forms and blocks of a study over the tracks it is for.
 *
 * @param relaxationTime  of the velocity, time, or null where none is resolved
 * @throws UsageError  for shapes that are unknown or impossible here
 */
export function planEstimation(
  tracks: TrackSet,
  study: Study,
  order: 'first' | 'second',
  relaxationTime: number | null,
  visited: VisitedRegion,
): EstimationPlan {
  const shapeContext = {
    low: visited.low,
    high: visited.high,
    periods: tracks.periods,
    positions: countPositions(tracks),
    fine: study.estimator === 'likelihood',
  };
  const planField = (shape: string, option: string, form: FieldPlan['form']): FieldPlan => ({
    basis: resolveBasis(parseShape(shape, option), shapeContext, option),
    form,
  });
  const second = order === 'second';
  const noiseOption = second ? '--noise' : '--diffusion';
  const noise = planField(second ? study.noise : study.diffusion, noiseOption, study.noiseForm);
  if (!noise.basis) {
    throw new UsageError(
      `${noiseOption} zero leaves nothing to fit the scatter with; use constant or spline`,
      {
        option: noiseOption,
      },
    );
  }
  return {
    order,
    force: planField(second ? study.force : study.drift, second ? '--force' : '--drift', 'vector'),
    friction: planField(second ? study.friction : 'zero', '--friction', study.frictionForm),
    noise,
    localizationError:
      study.localizationError === 'auto'
        ? null
        : new Array<number>(tracks.dimensions).fill(study.localizationError),
    exposure: study.exposure,
    blocks: partitionBlocks(tracks, relaxationTime ?? tracks.samplingInterval),
  };
}

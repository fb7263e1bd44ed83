/** What a worker does for a re-simulation: simulate the recording once and describe it. */

import type { Task } from '../numerics/MapTasks.js';
import { type Design, simulateDesign } from './simulateDesign.js';
import type { FeatureLayout } from './featureLayout.js';
import { measureFeatures } from './measureFeatures.js';

interface SharedWork {
  readonly design: Design;
  readonly layout: FeatureLayout;
  readonly seed: number;
}

interface Replicate {
  readonly index: number;
  /** Coefficients to simulate, or null: the fitted ones. */
  readonly draw: readonly number[] | null;
}

export const describeReplicateTask: Task<SharedWork, Replicate, { features: Float64Array }> = {
  name: 'describe-replicate',
  run({ design, layout, seed }, { index, draw }) {
    const positions = simulateDesign(design, draw, seed, `resimulate-${index}`, true);
    return { features: measureFeatures(layout, positions) };
  },
};

/**
 * An integrator moves one particle: positions (unwrapped on periodic axes) and, at second order, velocities, both
 * changed in place. Inner loops allocate nothing.
 */

import type { RandomStream } from '../numerics/random/RandomStream.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';

export interface Integrator {
  readonly evaluator: ScenarioEvaluator;
  /** Weak order: averages err by step to this power. */
  readonly weakOrder: number;
  /** Takes `count` steps of length `step`. At first order the velocity is not used. */
  advance(
    position: Float64Array,
    velocity: Float64Array,
    count: number,
    step: number,
    stream: RandomStream,
  ): void;
}

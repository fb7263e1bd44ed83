/** Reflecting walls. */

import type { Scenario } from '../documents/Scenario.js';

/** Reflecting walls per axis; −∞ and ∞ where there are none. */
export interface Walls {
  readonly low: Float64Array;
  readonly high: Float64Array;
}

/** The walls of a scenario, or null where no axis has any. */
export function readWalls(scenario: Scenario): Walls | null {
  if (scenario.axes.every((axis) => axis.kind !== 'walls')) return null;
  return {
    low: Float64Array.from(scenario.axes, (axis) => (axis.kind === 'walls' ? (axis.low ?? 0) : -Infinity)),
    high: Float64Array.from(scenario.axes, (axis) => (axis.kind === 'walls' ? (axis.high ?? 0) : Infinity)),
  };
}

/** Folds a position back between the walls as a mirror would; the velocity turns with it. */
export function reflect(position: Float64Array, velocity: Float64Array, walls: Walls): void {
  for (let axis = 0; axis < position.length; axis++) {
    const low = walls.low[axis];
    const high = walls.high[axis];
    let x = position[axis];
    if (x >= low && x <= high) continue;
    // A step many boxes long is folded at most a few times and then left for the finiteness check.
    for (let bounce = 0; bounce < 100 && (x < low || x > high); bounce++) {
      x = x < low ? 2 * low - x : 2 * high - x;
      velocity[axis] = -velocity[axis];
    }
    position[axis] = x;
  }
}

/**
 * Where coefficients are read outside the visited region, which is a choice of the scenario's author:
 *
 *   hold     the value at the nearest point of the visited box
 *   fade     from that value to a constant (given, or the mean over the box), within `width` of the edge
 *   confine  hold, with the force −stiffness · (distance beyond the edge) along each axis (drift at first order);
 *            a fading scenario may have a stiffness too
 */

import type { Scenario } from '../documents/Scenario.js';

/**
 * The place at which the coefficients are read: wrapped on periodic axes, moved to the visited box on others.
 *
 * @param excess  length d; how far the place lies beyond the box along each axis, with sign
 * @returns whether it lies outside the box
 */
export function continuePlaceInto(
  scenario: Scenario,
  at: Float64Array,
  place: Float64Array,
  excess: Float64Array,
): boolean {
  const { axes, visited, dimensions } = scenario;
  let outside = false;
  for (let axis = 0; axis < dimensions; axis++) {
    const { kind, low, high } = axes[axis];
    let value = at[axis];
    excess[axis] = 0;
    if (kind === 'periodic') {
      const start = low ?? 0;
      const period = (high ?? 1) - start;
      if (value < start || value >= start + period) value -= Math.floor((value - start) / period) * period;
    } else if (visited !== null) {
      const lower = visited.low[axis];
      const upper = visited.high[axis];
      const held = value < lower ? lower : value > upper ? upper : value;
      if (held !== value) outside = true;
      excess[axis] = value - held;
      value = held;
    }
    place[axis] = value;
  }
  return outside;
}

/** 1 at the edge of the box, 0 from `width` on, with continuous slope (cubic smoothstep). */
export function fadeWeight(excess: Float64Array, width: number): number {
  let square = 0;
  for (let axis = 0; axis < excess.length; axis++) square += excess[axis] * excess[axis];
  const t = Math.min(1, Math.sqrt(square) / width);
  return 1 - t * t * (3 - 2 * t);
}

/** Where tracks begin, and how fast. */

import type { Scenario } from '../documents/Scenario.js';
import type { RandomStream } from '../numerics/random/RandomStream.js';
import { createMatrixBathStep } from './matrixBathStep.js';
import { bathVariance } from './secondOrderIntegrator.js';
import type { ScenarioEvaluator } from './ScenarioEvaluator.js';
import { choleskyInto } from './smallMatrices.js';
import { readWalls, reflect } from './walls.js';

/** Draws position and velocity of a particle as a scenario starts its tracks; the velocity is 0 at first order. */
export function createStartDraw(
  scenario: Scenario,
  evaluator: ScenarioEvaluator,
): (position: Float64Array, velocity: Float64Array, stream: RandomStream) => void {
  const drawVelocity = createVelocityDraw(evaluator);
  return (position, velocity, stream) => {
    const given = drawStartPlace(scenario, position, stream);
    velocity.fill(0);
    if (scenario.order === 'first') return;
    if (given === null) drawVelocity(position, velocity, stream);
    else velocity.set(given);
  };
}

/** Draws where a track begins; returns its velocity where the scenario gives one. */
export function drawStartPlace(
  scenario: Scenario,
  start: Float64Array,
  stream: RandomStream,
): readonly number[] | null {
  const { kind, points, velocities, mean, spread } = scenario.start;
  if (kind === 'points') {
    const index = stream.integer(points.length);
    for (let axis = 0; axis < start.length; axis++) start[axis] = points[index][axis];
    return velocities.length > 0 ? velocities[index] : null;
  }
  for (let axis = 0; axis < start.length; axis++) {
    start[axis] = mean[axis] + spread[axis] * (kind === 'normal' ? stream.normal() : stream.uniform());
  }
  const walls = readWalls(scenario);
  if (walls !== null) reflect(start, new Float64Array(start.length), walls); // a normal law knows nothing of walls
  return null;
}

/**
 * Draws velocities from the law friction and noise would settle on with the place held fixed: covariance C with
 * Γ C + C Γᵀ = N (per axis N/(2Γ)). Where friction is next to nothing the variance is bounded by what the noise adds
 * within 100 times the time of the strongest friction seen.
 */
export function createVelocityDraw(
  evaluator: ScenarioEvaluator,
): (q: Float64Array, v: Float64Array, stream: RandomStream) => void {
  const { dimensions: d, bathSize, bathForm } = evaluator;
  const force = new Float64Array(d);
  const friction = new Float64Array(bathSize);
  const noise = new Float64Array(bathSize);
  const bath = createMatrixBathStep(d);
  const lower = new Float64Array(d * d);
  let strongest = 0;
  return (q, v, stream) => {
    evaluator.evaluateInto(q, force, friction, noise);
    for (let i = 0; i < bathSize; i++) strongest = Math.max(strongest, friction[i]);
    const horizon = strongest > 0 ? 100 / strongest : 1;
    v.fill(0);
    if (bathForm === 'matrix') {
      bath.prepare(friction, noise, horizon);
      choleskyInto(bath.covariance, d, lower);
      for (let j = 0; j < d; j++) {
        const xi = stream.normal();
        for (let i = j; i < d; i++) v[i] += lower[i * d + j] * xi;
      }
      return;
    }
    for (let axis = 0; axis < d; axis++) {
      const i = bathSize === 1 ? 0 : axis;
      const decay = Math.exp(-friction[i] * horizon);
      v[axis] = Math.sqrt(bathVariance(friction[i], noise[i], horizon, decay)) * stream.normal();
    }
  };
}

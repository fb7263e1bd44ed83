/**
 * Fine time stepping for the shipped data sets, on purpose written apart from the program's own integrators. With the
 * hundreds of substeps per frame used here, the error of stepping is far below the scatter of any fit.
 */

import type { FirstOrderTruth, SecondOrderTruth } from './truth.js';

/** Where the steps get their standard normals from; a `RandomStream` is one. */
export interface NormalSource {
  normal(): number;
}

/** Advances a first-order path in one dimension and returns the new place. */
export function advanceFirstOrder(
  truth: FirstOrderTruth,
  start: number,
  duration: number,
  substeps: number,
  stream: NormalSource,
): number {
  const dt = duration / substeps;
  const place = [start];
  for (let step = 0; step < substeps; step++) {
    const kick = stream.normal();
    // Milstein (1975): with σ = √(2D), the correction ½σσ′(ΔW² − dt) is ½D′(ΔW² − dt).
    const drift = truth.drift(place)[0];
    const slope = truth.diffusionSlope(place);
    place[0] +=
      drift * dt + Math.sqrt(2 * truth.diffusion(place) * dt) * kick + 0.5 * slope * dt * (kick * kick - 1);
  }
  return place[0];
}

/** A place and a velocity, each of length d; overwritten by `advanceSecondOrder`. */
export interface MovingState {
  readonly place: number[];
  readonly velocity: number[];
}

/**
 * Advances a second-order path: half a drift, a full kick with implicit-midpoint friction, half a drift.
 *
 * Source  Mannella, Quasisymplectic integrators for stochastic differential equations, Phys. Rev. E 69 (2004) 041107
 *         (the leapfrog variant); velocity variance exact for constant coefficients, error O(dt²) elsewhere.
 */
export function advanceSecondOrder(
  truth: SecondOrderTruth,
  state: MovingState,
  duration: number,
  substeps: number,
  stream: NormalSource,
): void {
  const { place, velocity } = state;
  const dt = duration / substeps;
  const dimensions = place.length;
  for (let step = 0; step < substeps; step++) {
    for (let axis = 0; axis < dimensions; axis++) place[axis] += 0.5 * dt * velocity[axis];
    const force = truth.force(place);
    const damping = 0.5 * dt * truth.friction(place);
    const agitation = Math.sqrt(truth.noise(place) * dt);
    for (let axis = 0; axis < dimensions; axis++) {
      const kick = force[axis] * dt + agitation * stream.normal();
      velocity[axis] = ((1 - damping) * velocity[axis] + kick) / (1 + damping);
      place[axis] += 0.5 * dt * velocity[axis];
    }
  }
}

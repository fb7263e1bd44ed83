/**
 * The force behind a model, and derivatives of it.
 *
 * Second order: the fitted force per mass, length/time². First order: what is left of the Itô drift once the part that
 * gradients of diffusion bring about is taken off, μ − ∇·D (the drift of the isothermal reading, length/time); times
 * D⁻¹ it is the force over the thermal energy, 1/length, for a medium at one temperature (Lau & Lubensky, Phys. Rev. E
 * 76 (2007) 011123).
 */

import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { invertMatrix } from '../numerics/linear/smallMatrix.js';

/** Writes a vector of place. */
export type VectorReader = (places: ArrayLike<number>, offset: number, out: Float64Array) => void;

/**
 * @param steps  length d: lengths over which differences are taken, short against what a coefficient varies over
 * @param perEnergy  at first order: times D⁻¹
 */
export function createForceReader(model: Model, steps: ArrayLike<number>, perEnergy: boolean): VectorReader {
  const evaluator = createModelEvaluator(model);
  if (model.order === 'second') return (places, offset, out) => evaluator.forceInto(places, offset, out);
  const d = model.dimensions;
  const place = new Float64Array(d);
  const above = new Float64Array(d * d);
  const below = new Float64Array(d * d);
  const moved = new Float64Array(d);
  return (places, offset, out) => {
    evaluator.forceInto(places, offset, out);
    for (let axis = 0; axis < d; axis++) place[axis] = places[offset + axis];
    for (let axis = 0; axis < d; axis++) {
      const centre = place[axis];
      place[axis] = centre + steps[axis];
      evaluator.noiseInto(place, 0, above);
      place[axis] = centre - steps[axis];
      evaluator.noiseInto(place, 0, below);
      place[axis] = centre;
      for (let i = 0; i < d; i++) out[i] -= (above[i * d + axis] - below[i * d + axis]) / (2 * steps[axis]);
    }
    if (!perEnergy) return;
    evaluator.noiseInto(place, 0, above);
    const inverse = invertMatrix(above, d);
    moved.set(out);
    for (let i = 0; i < d; i++) {
      out[i] = 0;
      for (let j = 0; j < d; j++) out[i] += inverse[i * d + j] * moved[j];
    }
  };
}

/**
 * Curl at places: one component in two dimensions (∂_x f_y − ∂_y f_x), three in three.
 *
 * @returns arrays of length m
 */
export function readCurl(
  reader: VectorReader,
  places: Float64Array,
  steps: ArrayLike<number>,
): Float64Array[] {
  const d = steps.length;
  const m = places.length / d;
  const planes =
    d === 2
      ? [[0, 1]]
      : [
          [1, 2],
          [2, 0],
          [0, 1],
        ];
  const curls = planes.map(() => new Float64Array(m));
  const place = new Float64Array(d);
  const above = new Float64Array(d);
  const below = new Float64Array(d);
  const slopes = new Float64Array(d * d); // ∂_axis f_i at axis · d + i
  for (let row = 0; row < m; row++) {
    for (let axis = 0; axis < d; axis++) place[axis] = places[row * d + axis];
    for (let axis = 0; axis < d; axis++) {
      const centre = place[axis];
      place[axis] = centre + steps[axis];
      reader(place, 0, above);
      place[axis] = centre - steps[axis];
      reader(place, 0, below);
      place[axis] = centre;
      for (let i = 0; i < d; i++) slopes[axis * d + i] = (above[i] - below[i]) / (2 * steps[axis]);
    }
    planes.forEach(([a, b], plane) => {
      curls[plane][row] = slopes[a * d + b] - slopes[b * d + a];
    });
  }
  return curls;
}

/** Steps for differences: a thousandth of the visited box along each axis. */
export function differenceSteps(low: readonly number[], high: readonly number[]): Float64Array {
  return Float64Array.from(low, (value, axis) => (high[axis] - value) / 1000);
}

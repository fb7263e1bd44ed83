/**
 * A model's coefficients as one vector: force, friction, noise at second order; drift, diffusion at first; component
 * by component within each field.
 */

import { UsageError } from '../errors.js';
import type { CoefficientField, Model } from './CoefficientField.js';

/** The model's fields in the order of the vector. */
export function modelFields(model: Model): readonly CoefficientField[] {
  return model.order === 'second'
    ? [model.force, model.friction, model.noise]
    : [model.drift, model.diffusion];
}

/** All coefficients, flattened. */
export function modelParameters(model: Model): Float64Array {
  return Float64Array.from(modelFields(model).flatMap((field) => field.coefficients.flat()));
}

/**
 * The same model with other coefficients.
 *
 * @param parameters  as long as `modelParameters(model)`
 * @throws UsageError  where the length differs
 */
export function withParameters(model: Model, parameters: ArrayLike<number>): Model {
  let at = 0;
  const take = (field: CoefficientField): CoefficientField => ({
    ...field,
    coefficients: field.coefficients.map((component) => component.map(() => parameters[at++])),
  });
  const changed: Model =
    model.order === 'second'
      ? { ...model, force: take(model.force), friction: take(model.friction), noise: take(model.noise) }
      : { ...model, drift: take(model.drift), diffusion: take(model.diffusion) };
  if (at !== parameters.length) {
    throw new UsageError(`the model has ${at} coefficients but ${parameters.length} were given`, {
      needed: at,
      found: parameters.length,
    });
  }
  return changed;
}

/**
 * The columns of a fit: every reported coefficient component by its name, as a function of place, for the estimate
 * and for any other coefficient vector of the same model.
 *
 * Names: force_x …, friction_xx …, noise_xx …, temperature_xx … at second order; drift_x …, diffusion_xx … at first.
 */

import { createModelEvaluator } from '../fields/evaluateModel.js';
import type { CoefficientField, Model } from '../fields/CoefficientField.js';
import { withParameters } from '../fields/modelParameters.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import type { ColumnScale } from './scales.js';

export interface ColumnPlan {
  readonly name: string;
  readonly scale: ColumnScale;
}

/** Names and scales of a model's columns, in the order they are printed. */
export function planColumns(model: Model): ColumnPlan[] {
  const axes = COORDINATE_NAMES.slice(0, model.dimensions);
  const vector = (name: string): ColumnPlan[] =>
    axes.map((axis) => ({ name: `${name}_${axis}`, scale: 'linear' }));
  const matrix = (field: CoefficientField, symmetric: boolean): ColumnPlan[] => {
    const scale: ColumnScale = field.link === 'log' ? 'logarithmic' : 'linear';
    return entriesOf(field.form, model.dimensions, symmetric).map(([i, j]) => ({
      name: `${field.name}_${axes[i]}${axes[j]}`,
      scale,
    }));
  };
  if (model.order === 'first') return [...vector('drift'), ...matrix(model.diffusion, true)];
  const ratioScale: ColumnScale = model.friction.link === 'log' ? 'logarithmic' : 'reciprocal';
  return [
    ...vector('force'),
    ...matrix(model.friction, false),
    ...matrix(model.noise, true),
    ...axes.map((axis): ColumnPlan => ({ name: `temperature_${axis}${axis}`, scale: ratioScale })),
  ];
}

/** Matrix entries that are printed: the diagonal first, then for matrices the rest row by row. */
export function entriesOf(form: string, dimensions: number, symmetric: boolean): [number, number][] {
  const entries: [number, number][] = [];
  for (let axis = 0; axis < dimensions; axis++) entries.push([axis, axis]);
  if (form !== 'matrix') return entries;
  for (let i = 0; i < dimensions; i++) {
    for (let j = symmetric ? i + 1 : 0; j < dimensions; j++) if (i !== j) entries.push([i, j]);
  }
  return entries;
}

/**
 * Evaluates every column at every place.
 *
 * @param places  shape (m, d), length
 * @returns one array of length m per column, in the order of `planColumns`; temperature is NaN where friction is zero
 */
export function evaluateColumns(model: Model, places: Float64Array): Float64Array[] {
  const d = model.dimensions;
  const m = places.length / d;
  const evaluator = createModelEvaluator(model);
  const second = model.order === 'second';
  const frictionEntries = second ? entriesOf(model.friction.form, d, false) : [];
  const noiseEntries = entriesOf(second ? model.noise.form : model.diffusion.form, d, true);
  const columns = planColumns(model).map(() => new Float64Array(m));
  const force = new Float64Array(d);
  const friction = new Float64Array(d * d);
  const noise = new Float64Array(d * d);
  for (let place = 0; place < m; place++) {
    let column = 0;
    evaluator.forceInto(places, place * d, force);
    for (let axis = 0; axis < d; axis++) columns[column++][place] = force[axis];
    if (second) {
      evaluator.frictionInto(places, place * d, friction);
      for (const [i, j] of frictionEntries) columns[column++][place] = friction[i * d + j];
    }
    evaluator.noiseInto(places, place * d, noise);
    for (const [i, j] of noiseEntries) columns[column++][place] = noise[i * d + j];
    if (!second) continue;
    for (let axis = 0; axis < d; axis++) {
      columns[column++][place] = noise[axis * d + axis] / (2 * friction[axis * d + axis]);
    }
  }
  return columns;
}

/** Evaluates every column for another coefficient vector of the same model. */
export function evaluateReplicate(
  model: Model,
  parameters: ArrayLike<number>,
  places: Float64Array,
): Float64Array[] {
  return evaluateColumns(withParameters(model, Float64Array.from(parameters)), places);
}

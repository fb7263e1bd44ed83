/** Single columns of a model at given places, by the names `evaluate` prints them under. */

import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { entriesOf, planColumns } from '../uncertainty/columns.js';

/** Names of the printed columns of one coefficient, e.g. `friction_xx`, `friction_yy`. */
export function columnNamesOf(model: Model, coefficient: string): string[] {
  return planColumns(model)
    .map(({ name }) => name)
    .filter((name) => name.split('_')[0] === coefficient);
}

/** Names of the columns that differ by form: one for a scalar, one per axis, or every entry of a matrix. */
export function distinctColumnNames(model: Model, coefficient: 'friction' | 'noise' | 'diffusion'): string[] {
  const field =
    model.order === 'first' ? model.diffusion : coefficient === 'friction' ? model.friction : model.noise;
  const entries = entriesOf(field.form, model.dimensions, coefficient !== 'friction');
  const kept = field.form === 'scalar' ? entries.slice(0, 1) : entries;
  return kept.map(([i, j]) => `${coefficient}_${COORDINATE_NAMES[i]}${COORDINATE_NAMES[j]}`);
}

/**
 * Values of columns at places.
 *
 * @param names  among `planColumns`
 * @param places  shape (m, d), length
 * @returns one array of length m per name; a temperature is NaN where friction is zero
 */
export function readColumns(model: Model, names: readonly string[], places: Float64Array): Float64Array[] {
  const d = model.dimensions;
  const m = places.length / d;
  const evaluator = createModelEvaluator(model);
  const readers = names.map((name) => parseColumn(name, d));
  const uses = (kind: ColumnKind): boolean =>
    readers.some((reader) => reader.kind === kind || (reader.kind === 'temperature' && kind !== 'vector'));
  const [useVector, useFriction, useNoise] = [uses('vector'), uses('friction'), uses('noise')];
  const vector = new Float64Array(d);
  const friction = new Float64Array(d * d);
  const noise = new Float64Array(d * d);
  const columns = names.map(() => new Float64Array(m));
  for (let place = 0; place < m; place++) {
    if (useVector) evaluator.forceInto(places, place * d, vector);
    if (useFriction) evaluator.frictionInto(places, place * d, friction);
    if (useNoise) evaluator.noiseInto(places, place * d, noise);
    for (let c = 0; c < readers.length; c++) {
      const { kind, index } = readers[c];
      columns[c][place] =
        kind === 'vector'
          ? vector[index]
          : kind === 'friction'
            ? friction[index]
            : kind === 'noise'
              ? noise[index]
              : noise[index] / (2 * friction[index]);
    }
  }
  return columns;
}

type ColumnKind = 'vector' | 'friction' | 'noise' | 'temperature';

function parseColumn(name: string, d: number): { kind: ColumnKind; index: number } {
  const [coefficient, letters = ''] = name.split('_');
  const axes = Array.from(letters, (letter) => COORDINATE_NAMES.findIndex((known) => known === letter));
  switch (coefficient) {
    case 'force':
    case 'drift':
      return { kind: 'vector', index: axes[0] };
    case 'friction':
    case 'temperature':
      return { kind: coefficient, index: axes[0] * d + axes[1] };
    default:
      return { kind: 'noise', index: axes[0] * d + axes[1] };
  }
}

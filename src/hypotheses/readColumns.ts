/** Single columns of a model at given places, by the names `evaluate` prints them under. */

import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { COORDINATE_NAMES } from '../tracks/TrackSet.js';
import { entriesOf } from '../uncertainty/columns.js';

/** Names of the columns that differ by form: one for a scalar, one per axis, or every entry of a matrix. */
export function distinctColumnNames(model: Model, coefficient: 'friction' | 'noise' | 'diffusion'): string[] {
  const field =
    model.order === 'first' ? model.diffusion : coefficient === 'friction' ? model.friction : model.noise;
  const entries = entriesOf(field.form, model.dimensions, coefficient !== 'friction');
  const kept = field.form === 'scalar' ? entries.slice(0, 1) : entries;
  return kept.map(([i, j]) => `${coefficient}_${COORDINATE_NAMES[i]}${COORDINATE_NAMES[j]}`);
}

/** Names of the temperatures that differ by form: one where friction and noise are scalars, else one per axis. */
export function distinctTemperatures(model: Model & { order: 'second' }): string[] {
  const isScalar = model.friction.form === 'scalar' && model.noise.form === 'scalar';
  return COORDINATE_NAMES.slice(0, isScalar ? 1 : model.dimensions).map(
    (axis) => `temperature_${axis}${axis}`,
  );
}

/**
 * Whether columns are exponentials of weighted sums. Their errors then follow a normal law on the logarithmic scale, and
 * statements about them are judged there.
 */
export function isLogarithmic(model: Model, names: readonly string[]): boolean {
  return names.every((name) => {
    const [coefficient] = name.split('_');
    if (coefficient === 'force' || coefficient === 'drift') return false;
    if (model.order === 'first') return model.diffusion.link === 'log';
    if (coefficient === 'temperature') return model.noise.link === 'log' && model.friction.link === 'log';
    return (coefficient === 'friction' ? model.friction : model.noise).link === 'log';
  });
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

/** Row and column of the matrix entry a name stands for: `friction_xy` is (0, 1); of a vector component, twice its axis. */
export function entryOf(name: string): [number, number] {
  const letters = name.split('_')[1] ?? '';
  const axes = Array.from(letters, (letter) => COORDINATE_NAMES.findIndex((known) => known === letter));
  return [axes[0], axes[axes.length - 1]];
}

type ColumnKind = 'vector' | 'friction' | 'noise' | 'temperature';

function parseColumn(name: string, d: number): { kind: ColumnKind; index: number } {
  const [coefficient] = name.split('_');
  const [row, column] = entryOf(name);
  switch (coefficient) {
    case 'force':
    case 'drift':
      return { kind: 'vector', index: row };
    case 'friction':
    case 'temperature':
      return { kind: coefficient, index: row * d + column };
    default:
      return { kind: 'noise', index: row * d + column };
  }
}

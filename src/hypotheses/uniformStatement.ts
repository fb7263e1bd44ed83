/** Uniformity: a coefficient is the same everywhere; what it is is left to the data. */

import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import { imposeMatrix } from './imposeField.js';
import { entryOf, isLogarithmic, readColumns } from './readColumns.js';
import { identity, type Statement } from './Statement.js';

/**
 * c_j(q) = φ_j for every column named.
 *
 * @param names  columns of friction, noise, diffusion or temperature that the form keeps apart; temperatures share one
 *   parameter, the others have one each
 */
export function createUniformStatement(model: Model, names: readonly string[]): Statement {
  const logarithmic = isLogarithmic(model, names);
  const isTemperature = names[0].startsWith('temperature');
  const parameterOf = (column: number): number => (isTemperature ? 0 : column);
  return {
    parameterNames: isTemperature ? ['temperature'] : names,
    columnNames: names,
    residualNames: names,
    extraNames: [],
    reportNames: [],
    logarithmic,
    columns: (at, places) => {
      const columns = readColumns(at, names, places);
      return logarithmic ? columns.map((values) => values.map(Math.log)) : columns;
    },
    extras: () => [],
    reports: () => [],
    combination: () => identity(names.length),
    target: (parameters, places) =>
      names.map((_, column) => {
        const value = parameters[parameterOf(column)];
        return new Float64Array(places.length / model.dimensions).fill(logarithmic ? Math.log(value) : value);
      }),
    impose: (at, parameters, nodes) =>
      isTemperature
        ? imposeTemperature(at, parameters[0], nodes)
        : imposeUniform(at, names, parameters, nodes),
    starts: (columns) => {
      const means = columns.map(meanOf).map((value) => (logarithmic ? Math.exp(value) : value));
      return [Float64Array.from(isTemperature ? [meanOf(means)] : means)];
    },
  };
}

function imposeUniform(
  model: Model,
  names: readonly string[],
  parameters: ArrayLike<number>,
  nodes: Float64Array,
): Model {
  const entries = names.map(entryOf);
  const coefficient = names[0].split('_')[0] as 'friction' | 'noise' | 'diffusion';
  const isSymmetric = coefficient !== 'friction';
  return imposeMatrix(
    model,
    coefficient,
    (_, i, j) => {
      const column = entries.findIndex(
        ([a, b]) => (a === i && b === j) || (isSymmetric && a === j && b === i),
      );
      if (column >= 0) return parameters[column];
      return i === j ? parameters[0] : 0; // a scalar stands for the whole diagonal
    },
    nodes,
  );
}

/** Noise = temperature (Γ + Γᵀ). */
export function imposeTemperature(model: Model, temperature: number, nodes: Float64Array): Model {
  const d = model.dimensions;
  const evaluator = createModelEvaluator(model);
  const friction = new Float64Array(d * d);
  return imposeMatrix(
    model,
    'noise',
    (node, i, j) => {
      evaluator.frictionInto(nodes, node * d, friction);
      return temperature * (friction[i * d + j] + friction[j * d + i]);
    },
    nodes,
  );
}

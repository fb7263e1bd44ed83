/** Uniformity: a coefficient is the same everywhere; what it is is left to the data. */

import type { Model } from '../fields/CoefficientField.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import { distinctColumnNames, readColumns } from './readColumns.js';
import { identity, type Statement } from './Statement.js';

/** c_j(q) = φ_j for every distinct component of friction, noise or diffusion. */
export function createUniformStatement(
  model: Model,
  coefficient: 'friction' | 'noise' | 'diffusion',
): Statement {
  const names = distinctColumnNames(model, coefficient);
  return {
    parameterNames: names,
    columnNames: names,
    residualNames: names,
    extraNames: [],
    reportNames: [],
    columns: (at, places) => readColumns(at, names, places),
    extras: () => [],
    reports: () => [],
    combination: () => identity(names.length),
    target: (parameters, places) =>
      names.map((_, j) => new Float64Array(places.length / model.dimensions).fill(parameters[j])),
    starts: (columns) => [Float64Array.from(columns, meanOf)],
  };
}

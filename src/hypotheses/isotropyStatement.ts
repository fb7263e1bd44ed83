/** Isotropic friction: the same along every axis, and none across; it may vary from place to place. */

import type { Model } from '../fields/CoefficientField.js';
import { meanOf } from '../numerics/statistics/meanOf.js';
import { imposeMatrix } from './imposeField.js';
import { distinctColumnNames, readColumns } from './readColumns.js';
import type { Statement } from './Statement.js';

/**
 * Γ_xx − Γ_yy = 0, Γ_yy − Γ_zz = 0, and every off-diagonal entry of a matrix 0.
 *
 * @param nodes  shape (m, d): places over which the entries are averaged for the report
 */
export function createIsotropyStatement(model: Model & { order: 'second' }, nodes: Float64Array): Statement {
  const d = model.dimensions;
  const names = distinctColumnNames(model, 'friction');
  const rows: { readonly name: string; readonly weights: readonly (readonly [number, number])[] }[] = [];
  for (let axis = 0; axis + 1 < d; axis++) {
    rows.push({
      name: `${names[axis]} - ${names[axis + 1]}`,
      weights: [
        [axis, 1],
        [axis + 1, -1],
      ],
    });
  }
  for (let column = d; column < names.length; column++)
    rows.push({ name: names[column], weights: [[column, 1]] });
  const combination = new Float64Array(rows.length * names.length);
  rows.forEach(({ weights }, row) => {
    for (const [column, weight] of weights) combination[row * names.length + column] = weight;
  });
  return {
    parameterNames: [],
    columnNames: names,
    residualNames: rows.map(({ name }) => name),
    extraNames: [],
    reportNames: names,
    logarithmic: false,
    columns: (at, places) => readColumns(at, names, places),
    extras: () => [],
    reports: (at) => readColumns(at, names, nodes).map(meanOf),
    combination: () => combination,
    target: () => null,
    impose: (at, _parameters, places) => {
      const diagonal = readColumns(at, names.slice(0, d), places);
      return imposeMatrix(
        at,
        'friction',
        (node, i, j) => (i === j ? meanOf(diagonal.map((values) => values[node])) : 0),
        places,
      );
    },
    starts: () => [new Float64Array(0)],
  };
}

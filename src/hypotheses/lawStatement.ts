/** A law: one or several columns equal a formula of place with parameters the data may choose. */

import type { Formula } from '../fields/formula.js';
import type { Model } from '../fields/CoefficientField.js';
import { identity, type Statement } from './Statement.js';
import { readColumns } from './readColumns.js';
import { proposeStarts } from './proposeStarts.js';

/** A formula with what is known of its parameters beforehand. */
export interface Law {
  readonly name: string;
  readonly formula: Formula;
  /** Values the search begins at. */
  readonly start: Readonly<Record<string, number>>;
  /** Parameters that are not for the data to choose. */
  readonly fixed: Readonly<Record<string, number>>;
}

/** Parameters of a law that the data may choose, in the order of the formula. */
export function freeParameters(law: Law): string[] {
  return law.formula.parameters.filter((name) => !Object.hasOwn(law.fixed, name));
}

/**
 * c_j(q) = formula(q; φ) for every column named.
 *
 * @param columnNames  as in `evaluate`; more than one where a law is meant for every axis
 */
export function createLawStatement(law: Law, columnNames: readonly string[], dimensions: number): Statement {
  const names = freeParameters(law);
  const evaluateInto = createLawEvaluator(law);
  return {
    parameterNames: names,
    columnNames,
    residualNames: columnNames,
    extraNames: [],
    reportNames: [],
    columns: (model: Model, places) => readColumns(model, columnNames, places),
    extras: () => [],
    reports: () => [],
    combination: () => identity(columnNames.length),
    target: (parameters, places) => {
      const values = new Float64Array(places.length / dimensions);
      evaluateInto(parameters, places, values);
      return columnNames.map(() => values);
    },
    starts: (columns, nodes) => proposeStarts(law, columns, nodes, dimensions),
  };
}

/** Writes the law's values at places, given its free parameters. */
export function createLawEvaluator(
  law: Law,
): (parameters: ArrayLike<number>, places: Float64Array, out: Float64Array) => void {
  const { formula, fixed } = law;
  const free = freeParameters(law);
  const all = Float64Array.from(formula.parameters, (name) => fixed[name] ?? 0);
  const slots = free.map((name) => formula.parameters.indexOf(name));
  const d = formula.coordinates.length;
  return (parameters, places, out) => {
    for (let i = 0; i < slots.length; i++) all[slots[i]] = parameters[i];
    for (let place = 0; place < out.length; place++) out[place] = formula.evaluate(places, place * d, all);
  };
}

/** A law: one or several columns equal a formula of place with parameters the data may choose. */

import type { Formula } from '../fields/formula.js';
import type { Model } from '../fields/CoefficientField.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { imposeMatrix, imposeVector } from './imposeField.js';
import { entryOf, isLogarithmic, readColumns } from './readColumns.js';
import { identity, type Statement } from './Statement.js';
import { proposeStarts } from './proposeStarts.js';
import type { ConcentrationReader } from './readConcentration.js';

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
 * @param model  of the flexible fit: decides whether the law is compared on a logarithmic scale
 * @param concentration  for formulas that know the concentration beside the coordinates
 */
export function createLawStatement(
  law: Law,
  columnNames: readonly string[],
  model: Model,
  concentration: ConcentrationReader | null = null,
): Statement {
  const { dimensions } = model;
  const logarithmic = isLogarithmic(model, columnNames);
  const names = freeParameters(law);
  const evaluateInto = createLawEvaluator(law, dimensions, concentration);
  return {
    parameterNames: names,
    columnNames,
    residualNames: columnNames,
    extraNames: [],
    reportNames: [],
    logarithmic,
    columns: (at, places) => {
      const columns = readColumns(at, columnNames, places);
      return logarithmic ? columns.map((values) => values.map(Math.log)) : columns;
    },
    extras: () => [],
    reports: () => [],
    combination: () => identity(columnNames.length),
    target: (parameters, places) => {
      const values = new Float64Array(places.length / dimensions);
      evaluateInto(parameters, places, values);
      if (logarithmic) for (let i = 0; i < values.length; i++) values[i] = Math.log(values[i]); // NaN forbids
      return columnNames.map(() => values);
    },
    impose: (at, parameters, nodes) => imposeLaw(at, columnNames, evaluateInto, parameters, nodes),
    starts: (columns, nodes) => {
      const values = logarithmic ? columns.map((column) => column.map(Math.exp)) : columns;
      return proposeStarts(law, evaluateInto, values, nodes, dimensions);
    },
  };
}

/** Entries or components named follow the law, the others stay; a temperature is imposed through the noise. */
function imposeLaw(
  model: Model,
  columnNames: readonly string[],
  evaluateInto: LawEvaluator,
  parameters: ArrayLike<number>,
  nodes: Float64Array,
): Model {
  const d = model.dimensions;
  const values = new Float64Array(nodes.length / d);
  evaluateInto(parameters, nodes, values);
  const [coefficient] = columnNames[0].split('_');
  const named = columnNames.map(entryOf);
  const evaluator = createModelEvaluator(model);
  if (coefficient === 'force' || coefficient === 'drift') {
    const vector = new Float64Array(d);
    const vectors = Array.from({ length: d }, () => values.slice());
    for (let node = 0; node < values.length; node++) {
      evaluator.forceInto(nodes, node * d, vector);
      for (let axis = 0; axis < d; axis++)
        if (!named.some(([row]) => row === axis)) vectors[axis][node] = vector[axis];
    }
    return imposeVector(model, vectors, nodes);
  }
  const matrix = new Float64Array(d * d);
  const isScalar = columnNames.length === 1 && columnNames[0].endsWith('_xx');
  const isNamed = (i: number, j: number): boolean =>
    named.some(([a, b]) => a === i && b === j) || (isScalar && i === j);
  if (coefficient === 'temperature') {
    return imposeMatrix(
      model,
      'noise',
      (node, i, j) => {
        evaluator.frictionInto(nodes, node * d, matrix);
        return values[node] * (matrix[i * d + j] + matrix[j * d + i]);
      },
      nodes,
    );
  }
  const isFriction = coefficient === 'friction';
  return imposeMatrix(
    model,
    isFriction ? 'friction' : model.order === 'first' ? 'diffusion' : 'noise',
    (node, i, j) => {
      if (isNamed(i, j)) return values[node];
      if (isFriction) evaluator.frictionInto(nodes, node * d, matrix);
      else evaluator.noiseInto(nodes, node * d, matrix);
      return matrix[i * d + j];
    },
    nodes,
  );
}

/** Writes a law's values at places, shape (m, d), given its free parameters. */
export type LawEvaluator = (parameters: ArrayLike<number>, places: Float64Array, out: Float64Array) => void;

/** @param concentration  where the formula knows the concentration beside the coordinates */
export function createLawEvaluator(
  law: Law,
  d: number,
  concentration: ConcentrationReader | null = null,
): LawEvaluator {
  const { formula, fixed } = law;
  const free = freeParameters(law);
  const all = Float64Array.from(formula.parameters, (name) => fixed[name] ?? 0);
  const slots = free.map((name) => formula.parameters.indexOf(name));
  const variables = createVariables(formula, d, concentration);
  return (parameters, places, out) => {
    for (let i = 0; i < slots.length; i++) all[slots[i]] = parameters[i];
    const { values, width } = variables(places);
    for (let place = 0; place < out.length; place++)
      out[place] = formula.evaluate(values, place * width, all);
  };
}

/** The variables of a formula at places: the coordinates, and behind them the concentration where it is known. */
function createVariables(
  formula: Formula,
  d: number,
  concentration: ConcentrationReader | null,
): (places: Float64Array) => { values: Float64Array; width: number } {
  if (concentration === null || formula.coordinates.length === d)
    return (places) => ({ values: places, width: d });
  let last: Float64Array | null = null; // laws are asked for the same nodes again and again
  let extended = new Float64Array(0);
  return (places) => {
    if (places !== last) {
      const column = concentration(places);
      extended = new Float64Array(column.length * (d + 1));
      for (let place = 0; place < column.length; place++) {
        extended.set(places.subarray(place * d, place * d + d), place * (d + 1));
        extended[place * (d + 1) + d] = column[place];
      }
      last = places;
    }
    return { values: extended, width: d + 1 };
  };
}

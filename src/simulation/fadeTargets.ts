/** The constants that coefficients fade to outside the visited box: given in the scenario, or means over the box. */

import type { Scenario } from '../documents/Scenario.js';
import type { FieldName } from '../fields/CoefficientField.js';
import { type Coefficient, isBasisField } from './coefficients.js';
import { fillMatrix, takeLogarithmOfSymmetricPart } from './smallMatrices.js';
import type { SumEvaluator } from '../fields/splineCells.js';

/** Where the components of one coefficient lie in the array of raw components. */
export interface Slot {
  readonly name: FieldName;
  readonly coefficient: Coefficient;
  readonly offset: number;
  readonly count: number;
}

const MEAN_PLACES = [64, 24, 10]; // per axis, by dimension: the midpoint rule errs far less than a fit

/**
 * Targets of all raw components (after `log` links, before `log-matrix` ones).
 *
 * @param writers  write the raw components of a place into `raw`
 * @param raw  scratch space of the writers
 */
export function findFadeTargets(
  scenario: Scenario,
  slots: readonly Slot[],
  writers: readonly SumEvaluator[],
  raw: Float64Array,
): Float64Array {
  const targets = averageOverBox(scenario, writers, raw);
  for (const { name, coefficient, offset } of slots) {
    const given = scenario.continuation.towards[name];
    if (given !== undefined) targets.set(toRaw(name, coefficient, given, scenario.dimensions), offset);
  }
  return targets;
}

/** Components as they stand before the `log-matrix` link. */
function toRaw(name: FieldName, coefficient: Coefficient, given: readonly number[], d: number): Float64Array {
  const components = Float64Array.from(given);
  if (!isBasisField(coefficient) || coefficient.link !== 'log-matrix') return components;
  const matrix = new Float64Array(d * d);
  fillMatrix(name, components, 0, d, matrix);
  takeLogarithmOfSymmetricPart(matrix, d);
  if (name === 'friction') return matrix;
  let next = 0;
  for (let i = 0; i < d; i++) for (let j = i; j < d; j++) components[next++] = matrix[i * d + j];
  return components;
}

/** Means over the visited box by the midpoint rule. */
function averageOverBox(
  scenario: Scenario,
  writers: readonly SumEvaluator[],
  raw: Float64Array,
): Float64Array {
  const { dimensions: d, visited } = scenario;
  const means = new Float64Array(raw.length);
  if (visited === null) return means;
  const perAxis = MEAN_PLACES[d - 1];
  const count = perAxis ** d;
  const place = new Float64Array(d);
  for (let index = 0; index < count; index++) {
    let rest = index;
    for (let axis = 0; axis < d; axis++) {
      const share = ((rest % perAxis) + 0.5) / perAxis;
      place[axis] = visited.low[axis] + share * (visited.high[axis] - visited.low[axis]);
      rest = Math.floor(rest / perAxis);
    }
    for (let i = 0; i < writers.length; i++) writers[i](place, raw, 0);
    for (let i = 0; i < raw.length; i++) means[i] += raw[i] / count;
  }
  return means;
}

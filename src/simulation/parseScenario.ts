/**
 * Reading a scenario file: the schema first, then what only several fields together can show.
 */

import { checkDocument, type DocumentPlace } from '../documents/checkDocument.js';
import { type Scenario, type ScenarioInput, scenarioSchema } from '../documents/Scenario.js';
import { UsageError } from '../errors.js';
import type { FieldForm, FieldName } from '../fields/CoefficientField.js';
import { COEFFICIENT_NAMES, type Coefficient, countComponents, isBasisField } from './coefficients.js';
import { INTEGRATOR_NAMES } from './createIntegrator.js';
import { fillMatrix, smallestSymmetricEigenvalue } from './smallMatrices.js';

/**
 * Checks a scenario and fills in what it leaves out. Formulas are only read when the scenario is run
 * (`createScenarioEvaluator`), because their reader is loaded on demand.
 *
 * @param value  what the JSON file holds
 * @param place  where it came from, for the error messages (a plain string names the file)
 * @throws UsageError  naming the field, what was found and what is needed
 */
export function parseScenario(
  value: unknown,
  place: string | Omit<DocumentPlace, 'kind'> = 'scenario',
): Scenario {
  const from = typeof place === 'string' ? { source: place } : place;
  const scenario = checkDocument(scenarioSchema, value, 'wanderlaw-scenario', { ...from, kind: 'scenario' });
  checkScenario(scenario, from.source);
  return scenario;
}

/**
 * A scenario from typed input, with the same checks as one from a file.
 *
 * @example
 * const trap = createScenario({
 *   format: 'wanderlaw-scenario',
 *   version: 1,
 *   dimensions: 1,
 *   order: 'first',
 *   axes: [{ kind: 'open' }],
 *   parameters: { k: 2 },
 *   coefficients: {
 *     drift: { form: 'vector', formulas: ['-k*x'] },
 *     diffusion: { form: 'scalar', values: [0.5] },
 *   },
 *   start: { kind: 'normal', mean: [0], spread: [0.5] },
 *   observation: { tracks: 10, frames: 100, interval: 0.1, localizationError: [0] },
 * });
 * console.log(trap.title, trap.reading); // what was left out has its default
 */
export function createScenario(input: ScenarioInput): Scenario {
  return parseScenario(input);
}

type Refuse = (field: string, message: string) => never;

function checkScenario(scenario: Scenario, name: string): void {
  const { dimensions, axes, visited, start, observation, integration, ensemble } = scenario;
  const refuse: Refuse = (field, message) => {
    throw new UsageError(`${name}: ${field}: ${message}`, { source: name, at: field });
  };
  const checkLength = (field: string, values: readonly unknown[]): void => {
    if (values.length !== dimensions) {
      refuse(
        field,
        `has ${values.length} entries but the scenario has ${dimensions} dimensions; give one per dimension`,
      );
    }
  };

  checkLength('axes', axes);
  axes.forEach(({ kind, low, high }, axis) => {
    if (kind === 'open') return;
    if (low === null || high === null) refuse(`axes[${axis}]`, `is ${kind} and needs low and high`);
    else if (!(low < high)) refuse(`axes[${axis}]`, `low ${low} must be below high ${high}`);
  });

  const wanted = COEFFICIENT_NAMES[scenario.order];
  for (const key of wanted) {
    const coefficient = scenario.coefficients[key];
    if (coefficient === undefined) {
      refuse(`coefficients.${key}`, `is missing; order "${scenario.order}" needs ${wanted.join(', ')}`);
    } else
      checkCoefficient(key, coefficient, dimensions, (field, message) =>
        refuse(`coefficients.${key}${field}`, message),
      );
  }
  for (const key of Object.keys(scenario.coefficients)) {
    if (!(wanted as readonly string[]).includes(key)) {
      refuse(
        `coefficients.${key}`,
        `has no place at order "${scenario.order}", which takes ${wanted.join(', ')}`,
      );
    }
  }
  for (const key of Object.keys(scenario.parameters)) {
    if (!/^[A-Za-z_][A-Za-z0-9_]*$/.test(key))
      refuse('parameters', `"${key}" is no name; use letters, digits and _`);
    if (['x', 'y', 'z'].includes(key)) refuse('parameters', `"${key}" is a coordinate; choose another name`);
  }

  checkContinuation(scenario, refuse);
  if (visited !== null) {
    checkLength('visited.low', visited.low);
    checkLength('visited.high', visited.high);
    visited.low.forEach((low, axis) => {
      if (!(low < visited.high[axis]))
        refuse(`visited.low[${axis}]`, `${low} must be below high ${visited.high[axis]}`);
    });
  }

  const own = INTEGRATOR_NAMES[scenario.order];
  if (![null, own].includes(integration.integrator)) {
    refuse(
      'integration.integrator',
      `"${integration.integrator}" does not solve order "${scenario.order}"; use "${own}" or leave it out`,
    );
  }

  if (start.kind === 'points') {
    if (start.points.length === 0) refuse('start.points', 'is empty; give at least one position');
    start.points.forEach((point, index) => {
      checkLength(`start.points[${index}]`, point);
      axes.forEach(({ kind, low, high }, axis) => {
        if (kind === 'walls' && (point[axis] < (low ?? -Infinity) || point[axis] > (high ?? Infinity)))
          refuse(
            `start.points[${index}][${axis}]`,
            `${point[axis]} lies outside the walls at ${low} and ${high}`,
          );
      });
    });
    if (start.velocities.length > 0 && start.velocities.length !== start.points.length) {
      refuse('start.velocities', `has ${start.velocities.length} entries for ${start.points.length} points`);
    }
    start.velocities.forEach((velocity, index) => checkLength(`start.velocities[${index}]`, velocity));
  } else {
    checkLength('start.mean', start.mean);
    checkLength('start.spread', start.spread);
    start.spread.forEach((spread, axis) => {
      if (spread < 0) refuse(`start.spread[${axis}]`, `must not be negative, got ${spread}`);
    });
  }
  checkLength('observation.localizationError', observation.localizationError);

  if (ensemble !== null) {
    const count = wanted.reduce((sum, key) => {
      const coefficient = scenario.coefficients[key];
      return sum + (coefficient && isBasisField(coefficient) ? coefficient.coefficients.flat().length : 0);
    }, 0);
    ensemble.draws.forEach((draw, index) => {
      if (draw.length !== count) {
        refuse(
          `ensemble.draws[${index}]`,
          `has ${draw.length} numbers but the fitted bases have ${count} coefficients`,
        );
      }
    });
  }
}

function checkContinuation(scenario: Scenario, refuse: Refuse): void {
  const { continuation, visited, dimensions } = scenario;
  const { kind, width, stiffness, towards } = continuation;
  if (kind === 'fade' && width === null) refuse('continuation.width', 'is needed to fade');
  if (kind === 'confine' && stiffness === null) refuse('continuation.stiffness', 'is needed to confine');
  if (kind !== 'hold' && visited === null) {
    refuse('visited', `is needed to ${kind}: the box outside of which coefficients are continued`);
  }
  for (const [key, values] of Object.entries(towards)) {
    const name = key as keyof typeof towards;
    const at = `continuation.towards.${key}`;
    const coefficient = scenario.coefficients[name];
    if (kind !== 'fade') refuse(at, `has no meaning with kind "${kind}"; only "fade" goes to constants`);
    if (coefficient === undefined) refuse(at, `names a coefficient the scenario does not have`);
    else {
      checkValues(
        name,
        coefficient.form,
        values,
        dimensions,
        (field, message) => refuse(`${at}${field}`, message),
        '',
      );
      const link = isBasisField(coefficient) ? coefficient.link : 'identity';
      if (link !== 'identity' && !isPositive(name, coefficient.form, values, dimensions))
        refuse(at, `must be above zero, because coefficients.${key} is given through its logarithm`);
    }
  }
}

function checkCoefficient(
  key: keyof Scenario['coefficients'],
  coefficient: Coefficient,
  dimensions: number,
  refuse: Refuse,
): void {
  const isVector = key === 'force' || key === 'drift';
  if ((coefficient.form === 'vector') !== isVector) {
    const forms = isVector ? 'vector' : 'scalar, axes or matrix';
    refuse('.form', `cannot be "${coefficient.form}"; use ${forms}`);
  }
  if (!('values' in coefficient)) {
    const count = countComponents(key, coefficient.form, dimensions);
    const [field, components] =
      'formulas' in coefficient
        ? ['.formulas', coefficient.formulas]
        : ['.coefficients', coefficient.coefficients];
    if (components.length !== count) {
      const shape = `form "${coefficient.form}" in ${dimensions} dimensions`;
      refuse(field, `has ${components.length} components but ${shape} takes ${count}`);
    }
  }
  if (isBasisField(coefficient)) {
    if (coefficient.name !== key) refuse('.name', `is "${coefficient.name}" but stands under ${key}`);
    const lengths = new Set(coefficient.coefficients.map((row) => row.length));
    if (lengths.size > 1)
      refuse('.coefficients', 'has components of different lengths; each needs one number per function');
  }
  if ('values' in coefficient)
    checkValues(key, coefficient.form, coefficient.values, dimensions, refuse, '.values');
}

/** Constants: as many as the form has, no negative friction or noise. */
function checkValues(
  key: FieldName,
  form: FieldForm,
  values: readonly number[],
  dimensions: number,
  refuse: Refuse,
  field: string,
): void {
  const count = countComponents(key, form, dimensions);
  if (values.length !== count) {
    refuse(
      field,
      `has ${values.length} components but form "${form}" in ${dimensions} dimensions takes ${count}`,
    );
  }
  if (form === 'vector') return;
  if (form !== 'matrix') {
    values.forEach((value, index) => {
      if (value < 0) refuse(`${field}[${index}]`, `${key} must not be negative, got ${value}`);
    });
    return;
  }
  const smallest = smallestEigenvalue(key, values, dimensions);
  if (smallest < 0) {
    const what = key === 'friction' ? 'the symmetric part of the friction' : `the ${key}`;
    refuse(
      field,
      `${what} must be positive, but its smallest eigenvalue is ${Number(smallest.toPrecision(4))}`,
    );
  }
}

function isPositive(key: FieldName, form: FieldForm, values: readonly number[], dimensions: number): boolean {
  return form === 'matrix'
    ? smallestEigenvalue(key, values, dimensions) > 0
    : values.every((value) => value > 0);
}

function smallestEigenvalue(key: FieldName, values: readonly number[], dimensions: number): number {
  const matrix = new Float64Array(dimensions * dimensions);
  fillMatrix(key, values, 0, dimensions, matrix);
  return smallestSymmetricEigenvalue(matrix, dimensions);
}

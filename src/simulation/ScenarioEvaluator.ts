/**
 * The coefficients of a scenario as functions of place, ready for the integrators' inner loops: fitted bases,
 * formulas and constants alike, with the continuation outside the visited box and floors under friction and noise.
 */

import type { Scenario } from '../documents/Scenario.js';
import { UsageError } from '../errors.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldForm, FieldName } from '../fields/CoefficientField.js';
import { createBasis } from '../fields/createBasis.js';
import { type FormulaReader, loadFormulaReader } from '../fields/formula.js';
import {
  type BasisField,
  COEFFICIENT_NAMES,
  type Coefficient,
  countComponents,
  isBasisField,
} from './coefficients.js';
import { continuePlaceInto, fadeWeight } from './continuation.js';
import { findFadeTargets, type Slot } from './fadeTargets.js';
import { clampToPositive, exponentiateSymmetricPart, fillMatrix } from './smallMatrices.js';
import { compileSplineCells, type SumEvaluator } from './splineCells.js';

/** How friction and noise are laid out: one number, one per axis, or a full d × d matrix (row-major). */
export type BathForm = 'scalar' | 'axes' | 'matrix';

export interface ScenarioEvaluator {
  readonly order: 'first' | 'second';
  readonly dimensions: number;
  /** The larger of the forms of friction and noise; both are written in it. */
  readonly bathForm: BathForm;
  /** Length of the friction and noise arrays: 1, d or d². */
  readonly bathSize: number;
  /** Whether friction and noise are the same everywhere. */
  readonly uniformBath: boolean;
  /**
   * The coefficients at a place.
   *
   * @param place  length d; on periodic axes any number
   * @param force  length d: force (second order) or drift in the scenario's reading (first order)
   * @param friction  length `bathSize`; untouched at first order
   * @param noise  length `bathSize`: noise or diffusion
   */
  evaluateInto(place: Float64Array, force: Float64Array, friction: Float64Array, noise: Float64Array): void;
  /** How many evaluations met a negative friction or noise, which is replaced by zero. */
  readonly floored: { friction: number; noise: number };
}

/**
 * @param draw  coefficient vector that replaces those of the basis fields (a member of the ensemble), model order
 * @param floors  whether negative friction and noise are replaced by zero, as every simulation does
 * @throws UsageError  where a formula cannot be read, or a basis does not match its coefficients
 */
export async function createScenarioEvaluator(
  scenario: Scenario,
  draw: ArrayLike<number> | null = null,
  floors = true,
): Promise<ScenarioEvaluator> {
  const usesFormulas = Object.values(scenario.coefficients).some(
    (entry) => entry !== undefined && 'formulas' in entry,
  );
  const readFormula = usesFormulas ? await loadFormulaReader() : null;
  return assembleEvaluator(scenario, draw, readFormula, floors);
}

/** The same for scenarios without formulas, at once. */
export function createBasisEvaluator(
  scenario: Scenario,
  draw: ArrayLike<number> | null = null,
): ScenarioEvaluator {
  return assembleEvaluator(scenario, draw, null, true);
}

function assembleEvaluator(
  scenario: Scenario,
  draw: ArrayLike<number> | null,
  readFormula: FormulaReader | null,
  floors: boolean,
): ScenarioEvaluator {
  const { dimensions: d, order } = scenario;
  const slots: Slot[] = [];
  let total = 0;
  for (const name of COEFFICIENT_NAMES[order]) {
    const coefficient = scenario.coefficients[name];
    if (coefficient === undefined)
      throw new UsageError(`scenario: coefficients.${name}: is missing`, { at: name });
    const count = countComponents(name, coefficient.form, d);
    slots.push({ name, coefficient, offset: total, count });
    total += count;
  }
  const raw = new Float64Array(total);
  const writers = compileSlots(scenario, slots, draw, readFormula, raw);
  const [forceSlot, frictionSlot] = slots;
  const noiseSlot = slots[slots.length - 1];
  const forms =
    order === 'second'
      ? [frictionSlot.coefficient.form, noiseSlot.coefficient.form]
      : [noiseSlot.coefficient.form];
  const bathForm: BathForm = forms.includes('matrix') ? 'matrix' : forms.includes('axes') ? 'axes' : 'scalar';
  const bathSize = bathForm === 'matrix' ? d * d : bathForm === 'axes' ? d : 1;
  const floored = { friction: 0, noise: 0 };
  const writeFriction = order === 'second' ? createBathWriter(frictionSlot, raw, d, bathForm, floors) : null;
  const writeNoise = createBathWriter(noiseSlot, raw, d, bathForm, floors);
  const targets =
    scenario.continuation.kind === 'fade' ? findFadeTargets(scenario, slots, writers, raw) : null;
  const { kind, width, stiffness } = scenario.continuation;
  const restoring = kind === 'hold' ? 0 : (stiffness ?? 0);

  const place = new Float64Array(d);
  const excess = new Float64Array(d);
  const isFree = scenario.visited === null && scenario.axes.every((axis) => axis.kind !== 'periodic');
  const evaluateInto: ScenarioEvaluator['evaluateInto'] = (at, force, friction, noise) => {
    let outside = false;
    let where = at;
    if (!isFree) {
      outside = continuePlaceInto(scenario, at, place, excess);
      where = place;
    }
    for (let i = 0; i < writers.length; i++) writers[i](where, raw, 0);
    if (outside && targets !== null) {
      const weight = fadeWeight(excess, width ?? 1);
      for (let i = 0; i < total; i++) raw[i] = targets[i] + weight * (raw[i] - targets[i]);
    }
    for (let axis = 0; axis < d; axis++) force[axis] = raw[forceSlot.offset + axis];
    if (outside && restoring > 0) {
      for (let axis = 0; axis < d; axis++) force[axis] -= restoring * excess[axis];
    }
    if (writeFriction !== null && writeFriction(friction)) floored.friction++;
    if (writeNoise(noise)) floored.noise++;
  };
  return {
    order,
    dimensions: d,
    bathForm,
    bathSize,
    uniformBath: slots.slice(1).every(({ coefficient }) => isUniform(coefficient)),
    evaluateInto,
    floored,
  };
}

function isUniform(coefficient: Coefficient): boolean {
  if ('values' in coefficient) return true;
  return isBasisField(coefficient) && coefficient.basis.kind === 'constant';
}

/** One writer per group of components that share a basis, and one per formula; constants are written once. */
function compileSlots(
  scenario: Scenario,
  slots: readonly Slot[],
  draw: ArrayLike<number> | null,
  readFormula: FormulaReader | null,
  raw: Float64Array,
): SumEvaluator[] {
  const writers: SumEvaluator[] = [];
  const groups = new Map<string, { spec: BasisSpec; weights: number[][]; targets: number[] }>();
  let used = 0;
  for (const slot of slots) {
    const { coefficient, offset, name } = slot;
    if (isBasisField(coefficient)) {
      const rows = takeCoefficients(scenario, coefficient, name, draw, used);
      used += rows.flat().length;
      const key = JSON.stringify(coefficient.basis);
      const group = groups.get(key) ?? { spec: coefficient.basis, weights: [], targets: [] };
      rows.forEach((row, component) => {
        group.weights.push(row);
        group.targets.push(offset + component);
      });
      groups.set(key, group);
    } else if ('formulas' in coefficient) {
      coefficient.formulas.forEach((text, component) => {
        writers.push(
          compileFormula(
            scenario,
            text,
            `coefficients.${name}.formulas[${component}]`,
            offset + component,
            readFormula,
          ),
        );
      });
    } else {
      // Constants share the writers' path, because fading and links overwrite the raw sums.
      coefficient.values.forEach((value, component) => {
        writers.push((_place, out) => {
          out[offset + component] = value;
        });
      });
    }
  }
  for (const { spec, weights, targets } of groups.values()) {
    writers.push(scatter(compileSums(spec, scenario.dimensions, weights), targets, raw.length));
  }
  for (const slot of slots) {
    if (isBasisField(slot.coefficient) && slot.coefficient.link === 'log') writers.push(exponential(slot));
  }
  return writers;
}

function takeCoefficients(
  scenario: Scenario,
  field: BasisField,
  name: FieldName,
  draw: ArrayLike<number> | null,
  start: number,
): number[][] {
  const basis = createBasis(field.basis as BasisSpec, scenario.dimensions);
  let next = start;
  return field.coefficients.map((row, component) => {
    if (row.length !== basis.functionCount) {
      const at = `coefficients.${name}.coefficients[${component}]`;
      throw new UsageError(
        `scenario: ${at}: has ${row.length} numbers but its basis has ${basis.functionCount} functions`,
        { at },
      );
    }
    return row.map((value) => (draw === null ? value : draw[next++]));
  });
}

/** Weighted sums of one basis, one after another from `outOffset` on. */
function compileSums(spec: BasisSpec, d: number, weights: readonly (readonly number[])[]): SumEvaluator {
  const basis = createBasis(spec, d);
  if (spec.kind === 'constant') {
    return (_place, out, outOffset) => {
      for (let sum = 0; sum < weights.length; sum++) out[outOffset + sum] = weights[sum][0];
    };
  }
  if (spec.kind === 'spline') {
    const cells = compileSplineCells(basis, spec, weights);
    if (cells !== null) return cells;
  }
  const flat = Float64Array.from(weights.flat());
  const k = basis.functionCount;
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  return (place, out, outOffset) => {
    const count = basis.evaluateInto(place, 0, indices, values);
    for (let sum = 0; sum < weights.length; sum++) {
      let total = 0;
      for (let i = 0; i < count; i++) total += flat[sum * k + indices[i]] * values[i];
      out[outOffset + sum] = total;
    }
  };
}

/** Sends sums to their places; straight through where those are neighbours. */
function scatter(evaluate: SumEvaluator, targets: readonly number[], size: number): SumEvaluator {
  if (targets.every((target, i) => target === targets[0] + i)) {
    return (place, out) => evaluate(place, out, targets[0]);
  }
  const sums = new Float64Array(size);
  const places = Int32Array.from(targets);
  return (place, out) => {
    evaluate(place, sums, 0);
    for (let i = 0; i < places.length; i++) out[places[i]] = sums[i];
  };
}

function compileFormula(
  scenario: Scenario,
  text: string,
  at: string,
  target: number,
  readFormula: FormulaReader | null,
): SumEvaluator {
  if (readFormula === null) throw new Error('a scenario with formulas needs the formula reader');
  const names = Object.keys(scenario.parameters);
  const parameters = Float64Array.from(Object.values(scenario.parameters));
  try {
    const formula = readFormula(text, {
      coordinates: ['x', 'y', 'z'].slice(0, scenario.dimensions),
      parameters: names,
    });
    const { evaluate } = formula;
    return (place, out) => {
      out[target] = evaluate(place, 0, parameters);
    };
  } catch (error) {
    if (!(error instanceof UsageError)) throw error;
    throw new UsageError(`scenario: ${at}: ${error.message}`, { ...error.facts, at });
  }
}

function exponential({ offset, count }: Slot): SumEvaluator {
  return (_place, out) => {
    for (let i = offset; i < offset + count; i++) out[i] = Math.exp(out[i]);
  };
}

/** Turns raw components into the common layout; returns whether a negative value was replaced by zero. */
function createBathWriter(
  slot: Slot,
  raw: Float64Array,
  d: number,
  bathForm: BathForm,
  floors: boolean,
): (out: Float64Array) => boolean {
  const { name, coefficient, offset } = slot;
  const form: FieldForm = coefficient.form;
  if (form === 'matrix') {
    const isLogMatrix = isBasisField(coefficient) && coefficient.link === 'log-matrix';
    return (out) => {
      fillMatrix(name, raw, offset, d, out);
      if (isLogMatrix) exponentiateSymmetricPart(out, d);
      return floors && clampToPositive(out, d);
    };
  }
  const stride = bathForm === 'matrix' ? d + 1 : 1; // along the diagonal of a matrix, or from axis to axis
  const size = bathForm === 'scalar' ? 1 : d;
  const perAxis = form === 'axes' ? 1 : 0;
  return (out) => {
    let negative = false;
    if (bathForm === 'matrix') out.fill(0);
    for (let axis = 0; axis < size; axis++) {
      let value = raw[offset + axis * perAxis];
      if (floors && value < 0) {
        value = 0;
        negative = true;
      }
      out[axis * stride] = value;
    }
    return negative;
  };
}

/**
 * The coefficients of a scenario as functions of place, ready for the integrators' inner loops: fitted bases,
 * formulas and constants alike, with the continuation outside the visited box and floors under friction and noise.
 */

import type { Scenario } from '../documents/Scenario.js';
import { UsageError } from '../errors.js';
import type { FieldForm } from '../fields/CoefficientField.js';
import { type FormulaReader, loadFormulaReader } from '../fields/formula.js';
import { COEFFICIENT_NAMES, type Coefficient, countComponents, isBasisField } from './coefficients.js';
import { compileSlots } from './compileCoefficients.js';
import { continuePlaceInto, fadeWeight } from './continuation.js';
import { findFadeTargets, type Slot } from './fadeTargets.js';
import { clampToPositive, exponentiateSymmetricPart, fillMatrix } from './smallMatrices.js';

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
  /** Noise or diffusion alone, for less than half the price. */
  noiseInto(place: Float64Array, noise: Float64Array): void;
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
  const writers = compileSlots(scenario, slots, draw, 0, readFormula, raw);
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
  const noiseWriters = compileSlots(
    scenario,
    [noiseSlot],
    draw,
    countNumbers(slots.slice(0, -1)),
    readFormula,
    raw,
  );
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
  const noiseInto: ScenarioEvaluator['noiseInto'] = (at, noise) => {
    let outside = false;
    let where = at;
    if (!isFree) {
      outside = continuePlaceInto(scenario, at, place, excess);
      where = place;
    }
    for (let i = 0; i < noiseWriters.length; i++) noiseWriters[i](where, raw, 0);
    if (outside && targets !== null) {
      const weight = fadeWeight(excess, width ?? 1);
      for (let i = noiseSlot.offset; i < total; i++) raw[i] = targets[i] + weight * (raw[i] - targets[i]);
    }
    if (writeNoise(noise)) floored.noise++;
  };
  return {
    order,
    dimensions: d,
    bathForm,
    bathSize,
    uniformBath: slots.slice(1).every(({ coefficient }) => isUniform(coefficient)),
    evaluateInto,
    noiseInto,
    floored,
  };
}

/** How many numbers of a draw belong to the slots. */
function countNumbers(slots: readonly Slot[]): number {
  return slots.reduce(
    (sum, { coefficient }) => sum + (isBasisField(coefficient) ? coefficient.coefficients.flat().length : 0),
    0,
  );
}

function isUniform(coefficient: Coefficient): boolean {
  if ('values' in coefficient) return true;
  return isBasisField(coefficient) && coefficient.basis.kind === 'constant';
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

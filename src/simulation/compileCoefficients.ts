/** The coefficients of a scenario compiled to functions that write their raw components: one per basis, one per formula. */

import type { Scenario } from '../documents/Scenario.js';
import { UsageError } from '../errors.js';
import type { BasisSpec } from '../fields/Basis.js';
import type { FieldName } from '../fields/CoefficientField.js';
import { compileSums } from '../fields/compileSums.js';
import { createBasis } from '../fields/createBasis.js';
import type { FormulaReader } from '../fields/formula.js';
import type { SumEvaluator } from '../fields/splineCells.js';
import { type BasisField, isBasisField } from './coefficients.js';
import type { Slot } from './fadeTargets.js';

/**
 * Writers of the raw components of some slots (after `log` links, before `log-matrix` ones).
 *
 * @param draw  coefficient vector of all basis fields that replaces their own, or null
 * @param drawOffset  where in it the numbers of these slots begin
 * @param readFormula  needed where a slot holds formulas
 * @throws UsageError  where a formula cannot be read, or a basis does not match its coefficients
 */
export function compileSlots(
  scenario: Scenario,
  slots: readonly Slot[],
  draw: ArrayLike<number> | null,
  drawOffset: number,
  readFormula: FormulaReader | null,
  raw: Float64Array,
): SumEvaluator[] {
  const writers: SumEvaluator[] = [];
  const groups = new Map<string, { spec: BasisSpec; weights: number[][]; targets: number[] }>();
  let used = drawOffset;
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
    writers.push(scatter(compileSums(createBasis(spec, scenario.dimensions), weights), targets, raw.length));
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

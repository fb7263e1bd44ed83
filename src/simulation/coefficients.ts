/**
 * The coefficients of a scenario by order, and how many components each form has.
 */

import type { Scenario } from '../documents/Scenario.js';
import type { FieldForm, FieldName } from '../fields/CoefficientField.js';

/** A coefficient of a scenario: a fitted basis field, formulas, or constants. */
export type Coefficient = NonNullable<Scenario['coefficients'][FieldName]>;

/** A coefficient given by basis functions. */
export type BasisField = Extract<Coefficient, { basis: unknown }>;

/** The coefficients of each order, in model order. */
export const COEFFICIENT_NAMES = {
  second: ['force', 'friction', 'noise'],
  first: ['drift', 'diffusion'],
} as const satisfies Record<Scenario['order'], readonly FieldName[]>;

/** Whether a coefficient is a weighted sum of basis functions (as in fit files). */
export function isBasisField(coefficient: Coefficient): coefficient is BasisField {
  return 'basis' in coefficient;
}

/** Components of a form: see `CoefficientField` for their order. */
export function countComponents(name: FieldName, form: FieldForm, dimensions: number): number {
  if (form === 'scalar') return 1;
  if (form === 'matrix')
    return name === 'friction' ? dimensions * dimensions : (dimensions * (dimensions + 1)) / 2;
  return dimensions;
}

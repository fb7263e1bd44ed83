/** How far out a scenario's coefficients have to be looked at before everything is known of them. */

import type { Scenario } from '../documents/Scenario.js';
import { COEFFICIENT_NAMES, type Coefficient, isBasisField } from './coefficients.js';
import type { Box } from './extremes.js';
import { probeBox } from './recommendedStep.js';

/** The box that shows all that can be told, and the axes along which coefficients go on changing beyond it. */
export interface Reach {
  readonly box: Box;
  /** Per axis: open, and nothing but the coefficients' own formulas says what they are far out. */
  readonly endless: readonly boolean[];
}

/**
 * With a visited box the coefficients outside of it follow from those on its faces. Without one, splines are held at
 * the edges of their own box, and formulas and polynomials go on for ever.
 */
export function findReach(scenario: Scenario): Reach {
  const { axes, visited } = scenario;
  const box = probeBox(scenario);
  if (visited !== null) return { box, endless: axes.map(() => false) };
  const low = [...box.low];
  const high = [...box.high];
  for (const name of COEFFICIENT_NAMES[scenario.order]) {
    const coefficient = scenario.coefficients[name];
    if (coefficient === undefined || !isBasisField(coefficient) || coefficient.basis.kind !== 'spline')
      continue;
    const { basis } = coefficient;
    axes.forEach(({ kind }, axis) => {
      if (kind !== 'open') return;
      low[axis] = Math.min(low[axis], basis.low[axis]);
      high[axis] = Math.max(high[axis], basis.high[axis]);
    });
  }
  return {
    box: { low, high },
    endless: axes.map(
      ({ kind }, axis) =>
        kind === 'open' &&
        COEFFICIENT_NAMES[scenario.order].some((name) => goesOn(scenario.coefficients[name], axis)),
    ),
  };
}

/** Whether a coefficient goes on changing along an open axis, however far out. */
export function goesOn(coefficient: Coefficient | undefined, axis: number): boolean {
  if (coefficient === undefined || 'values' in coefficient) return false;
  if ('formulas' in coefficient) {
    const word = new RegExp(`(?<![A-Za-z0-9_])${'xyz'[axis]}(?![A-Za-z0-9_])`);
    return coefficient.formulas.some((text) => word.test(text));
  }
  return coefficient.basis.kind === 'polynomial';
}

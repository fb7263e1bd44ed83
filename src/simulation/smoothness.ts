/** What a scenario's formulas say of the smoothness of its coefficients, read from their words. */

import type { Scenario } from '../documents/Scenario.js';
import { COEFFICIENT_NAMES } from './coefficients.js';

export interface SmoothnessFinding {
  readonly verdict: 'holds' | 'fails' | 'unknown';
  /** The formula that decided, as a field of the scenario; null where all is smooth. */
  readonly field: string | null;
  /** The word or sign in it that did. */
  readonly word: string | null;
}

/** Smooth for every argument. */
const SMOOTH = new Set(['exp', 'sin', 'cos', 'tanh', 'sinh', 'cosh', 'atan', 'asinh', 'sech']);
/** Continuous with bounded slopes, but bent somewhere. */
const BENT = new Set(['abs', 'min', 'max', 'hypot']);
const JUMPING = new Set(['sign']);

/**
 * `fails` for formulas that jump, `unknown` for those that may have a singular place (roots, logarithms, divisions by
 * something that depends on place, broken powers), `holds` for all others. Fitted bases are twice continuously
 * differentiable, and bends, as at the edge of a held region, leave the slopes bounded.
 */
export function assessSmoothness(scenario: Scenario): SmoothnessFinding {
  let doubt: SmoothnessFinding | null = null;
  for (const name of COEFFICIENT_NAMES[scenario.order]) {
    const coefficient = scenario.coefficients[name];
    if (coefficient === undefined || !('formulas' in coefficient)) continue;
    for (const [component, text] of coefficient.formulas.entries()) {
      const field = `coefficients.${name}.formulas[${component}]`;
      for (const [word] of text.matchAll(/[A-Za-z_]\w*(?=\s*\()/g)) {
        if (JUMPING.has(word)) return { verdict: 'fails', field, word };
        if (!SMOOTH.has(word) && !BENT.has(word)) doubt ??= { verdict: 'unknown', field, word };
      }
      const sign = findSingularOperator(text);
      if (sign !== null) doubt ??= { verdict: 'unknown', field, word: sign };
    }
  }
  return doubt ?? { verdict: 'holds', field: null, word: null };
}

/** A division by a coordinate or a parenthesis, or a power that is not a whole number ≥ 0. */
function findSingularOperator(text: string): string | null {
  for (const { 1: divisor } of text.matchAll(/\/\s*([A-Za-z_]\w*\s*\(?|\()?/g)) {
    if (divisor !== undefined && (/^[xyz]$/.test(divisor.trim()) || divisor.endsWith('('))) return '/';
  }
  for (const { 1: exponent } of text.matchAll(/\^\s*([-+]?[\w.]*)/g)) {
    if (!/^\+?\d+$/.test(exponent)) return '^';
  }
  return null;
}

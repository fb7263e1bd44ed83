/** Weighted sums of the functions of one basis, compiled for loops that read them at very many places. */

import type { Basis } from './Basis.js';
import { compileOwnSlopeCells, compileSplineCells, type SumEvaluator } from './splineCells.js';

/**
 * Compiles sums; evaluated, they are written one after another from `outOffset` on.
 *
 * @param weights  one array of k weights per sum
 */
export function compileSums(basis: Basis, weights: readonly (readonly number[])[]): SumEvaluator {
  const { spec } = basis;
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

/**
 * Compiles the slope of each component of a vector field along its own axis.
 *
 * @param weights  d arrays of k weights; component a is differentiated along axis a
 */
export function compileOwnSlopes(basis: Basis, weights: readonly (readonly number[])[]): SumEvaluator {
  const { spec } = basis;
  if (spec.kind === 'spline') {
    const cells = compileOwnSlopeCells(basis, spec, weights);
    if (cells !== null) return cells;
  }
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  return (place, out, outOffset) => {
    for (let axis = 0; axis < weights.length; axis++) {
      const count = basis.differentiateInto(place, 0, axis, indices, values);
      let slope = 0;
      for (let i = 0; i < count; i++) slope += weights[axis][indices[i]] * values[i];
      out[outOffset + axis] = slope;
    }
  };
}

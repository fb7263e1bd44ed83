/** The curl of a fitted force or drift: where it is not zero, no potential can be behind it. */

import type { FitResult } from '../documents/FitDocument.js';
import { createBasis } from '../fields/createBasis.js';

export interface EvaluatedCurl {
  /** Length m, as all below. */
  readonly values: Float64Array;
  /** Pointwise interval at the fit's confidence. */
  readonly low: Float64Array;
  readonly high: Float64Array;
}

/**
 * Curl of the force (second order) or of the drift (first order) in the plane of two axes a and b,
 *
 *     ∂F_b/∂a − ∂F_a/∂b,
 *
 * from the derivatives of the basis: positive where the field turns from axis a towards axis b. By Stokes' theorem it
 * is the work around a small loop per area of the loop.
 *
 * @param places  shape (m, d), length
 * @param first  axis a, 0 … d − 1
 * @param second  axis b, not a
 * @returns 1/time² (second order) or 1/time (first order); intervals from the scatter of the replicates, as for the
 *   field itself
 */
export function evaluateCurl(
  fit: FitResult,
  places: Float64Array,
  first: number,
  second: number,
): EvaluatedCurl {
  const { model, uncertainty } = fit;
  const field = model.order === 'second' ? model.force : model.drift;
  const d = model.dimensions;
  const basis = createBasis(field.basis, d);
  const m = places.length / d;
  const estimate = field.coefficients.flat();
  const indices = new Int32Array(basis.support);
  const slopes = new Float64Array(basis.support);
  const values = new Float64Array(m);
  const low = new Float64Array(m);
  const high = new Float64Array(m);
  // A curl is a weighted sum of coefficients; force and drift come first in a replicate, component by component.
  const capacity = 2 * basis.support;
  const numbers = new Int32Array(capacity);
  const weights = new Float64Array(capacity);
  for (let place = 0; place < m; place++) {
    let terms = 0;
    for (const [component, axis, sign] of [
      [second, first, 1],
      [first, second, -1],
    ] as const) {
      const count = basis.differentiateInto(places, place * d, axis, indices, slopes);
      for (let i = 0; i < count; i++) {
        numbers[terms] = component * basis.functionCount + indices[i];
        weights[terms++] = sign * slopes[i];
      }
    }
    const sumOver = (coefficients: ArrayLike<number>): number => {
      let sum = 0;
      for (let i = 0; i < terms; i++) sum += weights[i] * coefficients[numbers[i]];
      return sum;
    };
    const value = sumOver(estimate);
    let squares = 0;
    for (const replicate of uncertainty.replicates) squares += (sumOver(replicate) - value) ** 2;
    const half = uncertainty.multiplier * Math.sqrt(squares / uncertainty.replicates.length);
    values[place] = value;
    low[place] = value - half;
    high[place] = value + half;
  }
  return { values, low, high };
}

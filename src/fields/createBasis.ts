/** From a basis as data to its functions. */

import { UsageError } from '../errors.js';
import type { Basis, BasisSpec } from './Basis.js';
import { createConstantBasis } from './basis/constantBasis.js';
import { createPolynomialBasis } from './basis/polynomialBasis.js';
import { createSplineBasis } from './basis/splineBasis.js';
import { createWavesBasis } from './basis/wavesBasis.js';

/**
 * Builds a basis.
 *
 * @throws UsageError  where a per-axis list of the spec does not have one entry per dimension
 */
export function createBasis(spec: BasisSpec, dimensions: number): Basis {
  switch (spec.kind) {
    case 'constant':
      return createConstantBasis(dimensions);
    case 'polynomial':
      checkLengths(spec.kind, dimensions, { centre: spec.centre, scale: spec.scale });
      return createPolynomialBasis(spec, dimensions);
    case 'spline':
      checkLengths(spec.kind, dimensions, {
        counts: spec.counts,
        low: spec.low,
        high: spec.high,
        periods: spec.periods,
      });
      return createSplineBasis(spec, dimensions);
    case 'waves':
      checkLengths(spec.kind, dimensions, { periods: spec.periods });
      return createWavesBasis(spec, dimensions);
  }
}

function checkLengths(kind: string, dimensions: number, lists: Record<string, readonly number[]>): void {
  for (const [name, list] of Object.entries(lists)) {
    if (list.length !== dimensions) {
      throw new UsageError(
        `the ${kind} basis needs ${dimensions} numbers in "${name}", one per dimension, but has ${list.length}`,
        { name, found: list.length, needed: dimensions },
      );
    }
  }
}

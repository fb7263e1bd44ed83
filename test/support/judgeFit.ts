/** How far a fit is from a known truth over its visited region, and how often its bands hold. */

import type { FitResult } from '../../src/documents/FitDocument.js';
import { visitedCentres } from '../../src/tracks/visitedRegion.js';
import { measureDistance } from '../../src/uncertainty/scales.js';
import { measureSpread } from '../../src/uncertainty/spread.js';
import { truthOf, type VariedCase } from './variedCases.js';

export interface ColumnVerdict {
  readonly name: string;
  /** Root mean square error over the visited places, relative to the truth (force and drift: to their own size). */
  readonly error: number;
  /** Share of the places whose pointwise interval holds the truth. */
  readonly coverage: number;
  /** Whether the simultaneous band holds everywhere. */
  readonly held: boolean;
}

export function judgeFit(fit: FitResult, given: VariedCase): ColumnVerdict[] {
  const centres = visitedCentres(fit.visited);
  const d = given.dimensions;
  const m = centres.length / d;
  return measureSpread(fit.model, fit.uncertainty.replicates, centres).map((spread) => {
    const isVector = /^(force|drift)/.test(spread.name);
    let size = 0;
    let squares = 0;
    let covered = 0;
    let held = true;
    for (let i = 0; i < m; i++) {
      const truth = truthOf(given, spread.name, centres.subarray(i * d, i * d + d));
      const value = spread.values[i];
      size += isVector ? truth * truth : 1;
      squares += (isVector ? value - truth : value / truth - 1) ** 2;
      // Not a number where an estimate that should be positive is not: then neither holds.
      const distance = Math.abs(measureDistance(spread.scale, value, truth));
      if (distance <= fit.uncertainty.multiplier * spread.deviations[i]) covered++;
      if (!(distance <= fit.uncertainty.simultaneous[spread.name] * spread.deviations[i])) held = false;
    }
    return { name: spread.name, error: Math.sqrt(squares / size), coverage: covered / m, held };
  });
}

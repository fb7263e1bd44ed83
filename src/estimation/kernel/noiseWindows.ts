/**
 * Windows and weights for a coefficient that is itself the size of the scatter: a product of residuals varies as the square
 * of the noise it measures, so that one bandwidth for all places would be chosen where the noise is strong, and be too wide
 * for the places where it is weak.
 *
 * Source  the optimal local bandwidth under varying variance: Fan & Gijbels, Local Polynomial Modelling and Its Applications
 *         (1996), eq. 3.20.
 */

import type { BinnedMoments } from './BinnedMoments.js';
import { createFieldSmoother } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import type { LocalField } from './localFields.js';
import { referenceBandwidth } from './plugInStart.js';
import { solveFields } from './solveFields.js';
import { createWindows, type KnotWindows } from './windows.js';

/** Of the mean noise: a pilot estimate below, perhaps negative, is not taken at its word. */
const LEAST_NOISE = 1 / 8;

export interface NoiseWindows {
  readonly windows: KnotWindows;
  /** The moments with the squared instruments behind them weighed by the variance of a row, for cross-validation. */
  readonly moments: BinnedMoments;
}

/**
 * Windows for a noise that varies over place, from a pilot estimate with windows for equal scatter.
 *
 * @param diagonal  numbers of the components that are variances
 * @param bandwidth  of the pilot, per axis, length
 */
export function createNoiseWindows(
  moments: BinnedMoments,
  field: LocalField,
  diagonal: readonly number[],
  grid: KernelGrid,
  bandwidth: readonly number[],
): NoiseWindows {
  const { counts } = moments;
  const scales = referenceBandwidth(grid, counts);
  const even = createWindows(grid, counts, scales);
  if (!field.varies) return { windows: even, moments };
  const smoother = createFieldSmoother(moments, field, grid, even, bandwidth);
  const [pilot] = solveFields(moments, [smoother], moments.total.vector).values;
  const variances = relativeVariances(pilot, diagonal, counts);
  return {
    windows: createWindows(grid, counts, scales, variances),
    moments: { ...moments, gram: moments.gram.map((value, knot) => value * variances[knot]) },
  };
}

/** Square of the noise over its mean over the rows, length K. */
function relativeVariances(
  pilot: Float64Array,
  diagonal: readonly number[],
  counts: Float64Array,
): Float64Array {
  const size = counts.length;
  const sizes = counts.map((_, knot) =>
    diagonal.reduce((sum, component) => sum + pilot[component * size + knot], 0),
  );
  let mean = 0;
  let rows = 0;
  for (let knot = 0; knot < size; knot++) {
    mean += counts[knot] * sizes[knot];
    rows += counts[knot];
  }
  mean /= rows;
  if (!(mean > 0)) return sizes.fill(1);
  return sizes.map((value) => Math.max(LEAST_NOISE, value / mean) ** 2);
}

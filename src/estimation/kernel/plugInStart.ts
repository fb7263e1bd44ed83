/**
 * Where the search for a bandwidth starts: the direct plug-in rule in one dimension, the normal reference rule in more.
 *
 * Source  Ruppert, Sheather & Wand, J. Am. Stat. Assoc. 90 (1995) 1257; Scott, Multivariate Density Estimation (1992), ch. 6.
 */

import { directPlugIn } from '../../numerics/smoothing/directPlugIn.js';
import type { BinnedMoments } from './BinnedMoments.js';
import { type KernelGrid, separateKnots } from './grid.js';

/** σ n^{−1/(4+d)} per axis, with the standard deviation around the circular mean on periodic axes; length. */
export function referenceBandwidth(grid: KernelGrid, counts: Float64Array): number[] {
  const { dimensions: d, size } = grid;
  const rows = counts.reduce((sum, count) => sum + count, 0);
  // Half the mean square distance of two rows: the variance, and on a circle something that does not depend on where it is cut.
  return Array.from({ length: d }, (_, axis) => {
    let sum = 0;
    for (let i = 0; i < size; i++) {
      if (counts[i] === 0) continue;
      for (let j = 0; j < size; j++) sum += counts[i] * counts[j] * separateKnots(grid, i, j, axis) ** 2;
    }
    const deviation = Math.sqrt(sum / 2) / rows;
    return Math.max(deviation, grid.spacing[axis]) * rows ** (-1 / (4 + d));
  });
}

/** The reference rule is for densities; coefficients are known less well than those and want wider windows. */
const REGRESSION = 2;

/** Places and responses of the ordinary regression that stands for a field in the plug-in rule. */
export interface PlugInData {
  readonly places: number[];
  readonly responses: number[];
}

/**
 * The start for one field.
 *
 * @param data  of the field; one dimension only
 */
export function startBandwidth(grid: KernelGrid, moments: BinnedMoments, data: PlugInData | null): number[] {
  const reference = referenceBandwidth(grid, moments.counts).map((width) => REGRESSION * width);
  if (!data) return reference;
  const chosen = directPlugIn(data.places, data.responses);
  return Number.isFinite(chosen) && chosen > 0 ? [chosen] : reference;
}

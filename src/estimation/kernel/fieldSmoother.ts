/**
 * The smoother of one field: from its moment vectors to its values at all knots.
 */

import type { BinnedMoments } from './BinnedMoments.js';
import type { KernelGrid } from './grid.js';
import { type ComponentGroup, groupComponents, type LocalField } from './localFields.js';
import { applyWeights, averageWeights, localLinearWeights, type RowSums, sumRows } from './localLinear.js';
import { type KnotWindows, spreadBandwidth } from './windows.js';

export interface FieldSmoother {
  readonly field: LocalField;
  readonly parts: readonly { readonly group: ComponentGroup; readonly weights: Float64Array }[];
}

/**
 * Prepares a field's smoother over all moments.
 *
 * @param bandwidth  per axis, length; not used for a field that does not vary
 */
export function createFieldSmoother(
  moments: BinnedMoments,
  field: LocalField,
  grid: KernelGrid,
  windows: KnotWindows,
  bandwidth: readonly number[],
): FieldSmoother {
  const parts = groupComponents(field, moments.instruments).map((group) => {
    const sums = sumRows(moments, moments.total.matrix, group, grid);
    return { group, weights: smoothingWeights(sums, field.varies, grid, windows, bandwidth) };
  });
  return { field, parts };
}

/** Weights of one group, continued to knots that are not visited; shape (m, K, m, K). */
export function smoothingWeights(
  sums: RowSums,
  varies: boolean,
  grid: KernelGrid,
  windows: KnotWindows,
  bandwidth: readonly number[],
): Float64Array {
  if (!varies) return averageWeights(sums, grid.size);
  const widths = spreadBandwidth(windows, bandwidth, grid);
  const weights = localLinearWeights(sums, grid, widths, windows.visited);
  const row = sums.components * grid.size;
  for (let a = 0; a < sums.components; a++) {
    windows.sources.forEach((sources, knot) => {
      if (sources.length === 1 && sources[0] === knot) return;
      const target = (a * grid.size + knot) * row;
      for (const source of sources) {
        const from = (a * grid.size + source) * row;
        for (let i = 0; i < row; i++) weights[target + i] += weights[from + i] / sources.length;
      }
    });
  }
  return weights;
}

/**
 * Smooths the moments of a field.
 *
 * @param moments  shape (components, K)
 * @returns values at the knots, shape (components, K)
 */
export function smooth(smoother: FieldSmoother, moments: Float64Array): Float64Array {
  const out = new Float64Array(moments.length);
  for (const { group, weights } of smoother.parts) applyWeights(group, weights, moments, out);
  return out;
}

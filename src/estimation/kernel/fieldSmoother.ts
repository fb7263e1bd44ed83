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
  readonly windows: KnotWindows;
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
  const groups = groupComponents(field, moments.instruments);
  const sums = groups.map((group) => sumRows(moments, moments.total.matrix, group, grid));
  const widths = field.varies ? spreadBandwidth(windows, bandwidth, grid) : null;
  return smootherOf(field, groups, sums, grid, windows, widths);
}

/**
 * The smoother for given row sums.
 *
 * @param widths  shape (K, d): standard deviations of the kernel; null for a field that does not vary
 */
export function smootherOf(
  field: LocalField,
  groups: readonly ComponentGroup[],
  sums: readonly RowSums[],
  grid: KernelGrid,
  windows: KnotWindows,
  widths: Float64Array | null,
): FieldSmoother {
  const parts = groups.map((group, g) => ({
    group,
    weights: widths
      ? localLinearWeights(sums[g], grid, widths, windows.visited)
      : averageWeights(sums[g], grid.size),
  }));
  return { field, windows, parts };
}

/**
 * Smooths the moments of a field. Knots that are not visited continue the nearest ones that are.
 *
 * @param moments  shape (components, K)
 * @returns values at the knots, shape (components, K)
 */
export function smooth(smoother: FieldSmoother, moments: Float64Array): Float64Array {
  const { field, windows, parts } = smoother;
  const size = moments.length / field.components.length;
  const out = new Float64Array(moments.length);
  for (const { group, weights } of parts) {
    applyWeights(group, weights, moments, size).forEach((estimates, set) => {
      estimates.forEach((values, a) => {
        const base = group.members[set][a] * size;
        if (!field.varies) out.fill(values[0], base, base + size);
        else continueInto(windows, values, out.subarray(base, base + size));
      });
    });
  }
  return out;
}

/** @param values  at the visited knots; @param out  length K */
function continueInto(windows: KnotWindows, values: Float64Array, out: Float64Array): void {
  const { visited, sources } = windows;
  for (let i = 0; i < visited.length; i++) out[visited[i]] = values[i];
  for (let knot = 0; knot < out.length; knot++) {
    const near = sources[knot];
    if (near.length === 1 && near[0] === knot) continue;
    let sum = 0;
    for (const source of near) sum += out[source];
    out[knot] = sum / near.length;
  }
}

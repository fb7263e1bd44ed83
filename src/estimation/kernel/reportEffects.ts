/**
 * The effects of blocks as the bootstrap gets them: corrected for few blocks, and with standard deviations that are
 * smooth over space.
 *
 * A standard deviation read from the blocks in one window is itself uncertain, and for products of residuals it is small
 * just where the estimate happens to be small, so that intervals miss upwards too often. What the design makes of it, its
 * rise towards the edge above all, is known: the standard deviation for uncorrelated rows of equal variance. The
 * logarithm of the ratio to that, which varies slowly, is smoothed as a line over windows twice as wide, each knot
 * weighing as much as it has degrees of freedom, and effects are scaled to it.
 *
 * Source  smoothing of variances in local regression: Ruppert, Wand, Holst & Hössjer, Local polynomial variance-function
 *         estimation, Technometrics 39 (1997) 262.
 */

import { type BlockShares, measureShares } from './fewBlocks.js';
import { smooth, smootherOf } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import { groupComponents, type LocalField } from './localFields.js';
import { type KnotWindows, spreadBandwidth, WIDEST_ON_PERIOD } from './windows.js';

/** A field of the parameter vector: K values per component where it varies, one where it does not. */
export interface EstimatedField {
  readonly components: number;
  /** Per axis, length; null for a field that does not vary. */
  readonly bandwidth: readonly number[] | null;
}

const WIDER = 2;
const LARGEST_CHANGE = 2; // of a standard deviation, either way

/**
 * Effects to report.
 *
 * @param fields  in the order of the parameters
 * @param influences  first-order effects, shape (B, p)
 * @param blockCounts  per block, length K: rows that each knot stands for
 * @returns shape (B, p)
 */
export function reportEffects(
  fields: readonly EstimatedField[],
  influences: Float64Array,
  grid: KernelGrid,
  windows: KnotWindows,
  blockCounts: readonly Float64Array[],
): Float64Array {
  const blocks = blockCounts.length;
  const p = influences.length / blocks;
  const effects = influences.slice();
  let offset = 0;
  for (const { components, bandwidth } of fields) {
    const shares = measureShares(grid, windows, bandwidth, blockCounts);
    const values = bandwidth === null ? 1 : grid.size;
    for (let component = 0; component < components; component++, offset += values) {
      for (let block = 0; block < blocks; block++) {
        for (let knot = 0; knot < values; knot++)
          effects[block * p + offset + knot] *= shares.leverageFactors[block * grid.size + knot];
      }
      const scales =
        bandwidth === null ? null : steadyScales(effects, p, offset, shares, grid, windows, bandwidth);
      for (let block = 0; block < blocks; block++) {
        for (let knot = 0; knot < values; knot++)
          effects[block * p + offset + knot] *= shares.widening[knot] * (scales ? scales[knot] : 1);
      }
    }
  }
  return effects;
}

/** Smoothed standard deviation over the plain one, per knot. */
function steadyScales(
  effects: Float64Array,
  p: number,
  offset: number,
  { freedom, designDeviations }: BlockShares,
  grid: KernelGrid,
  windows: KnotWindows,
  bandwidth: readonly number[],
): Float64Array {
  const { size, dimensions: d, periods } = grid;
  const logarithms = new Float64Array(size);
  for (let knot = 0; knot < size; knot++) {
    let sum = 0;
    for (let at = offset + knot; at < effects.length; at += p) sum += effects[at] ** 2;
    logarithms[knot] =
      Math.log(sum + Number.MIN_VALUE) / 2 - Math.log(designDeviations[knot] + Number.MIN_VALUE);
  }
  const weights = new Float64Array(size);
  for (const knot of windows.visited) weights[knot] = freedom[knot];
  const widths = spreadBandwidth(windows, bandwidth, grid).map((width, i) => {
    const period = periods[i % d];
    return period > 0 ? Math.min(WIDER * width, WIDEST_ON_PERIOD * period) : WIDER * width;
  });
  const field: LocalField = { name: 'noise', varies: true, components: [[[0, 0]]] };
  const sums = { components: 1, zeroth: weights, first: new Float64Array(size * d) };
  const smoother = smootherOf(field, groupComponents(field, 1), [sums], grid, windows, widths);
  const smoothed = smooth(
    smoother,
    weights.map((weight, knot) => weight * logarithms[knot]),
  );
  const most = Math.log(LARGEST_CHANGE);
  return smoothed.map((value, knot) => Math.exp(Math.max(-most, Math.min(most, value - logarithms[knot]))));
}

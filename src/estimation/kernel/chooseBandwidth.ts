/**
 * The bandwidth of one field by block cross-validation: estimated from half of the blocks, it shall explain the moments
 * of the other half. Leaving out that much makes the choice far steadier than leaving out a tenth; as the half data want
 * a wider window, the choice is scaled to all of them by (1/2)^{1/(4+d)}.
 *
 * The search runs over powers of √2 around the start, with the axes in fixed proportion, then lets each axis differ.
 *
 * Source  whole blocks, because errors along a track are correlated: Rice & Silverman, Estimating the mean and covariance
 *         structure nonparametrically when the data are curves, J. R. Stat. Soc. B 53 (1991) 233; steadier from part of the
 *         data, rescaled: Hall & Robinson, Reducing variability of crossvalidation for smoothing-parameter choice,
 *         Biometrika 96 (2009) 175.
 */

import type { BinnedMoments } from './BinnedMoments.js';
import { smooth, smootherOf } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import { gatherMoments, groupComponents, type LocalField } from './localFields.js';
import { sumRows, withoutRows } from './localLinear.js';
import { explainAway } from './solveFields.js';
import { type KnotWindows, spreadBandwidth, WIDEST_ON_PERIOD } from './windows.js';

/** Parts the blocks are dealt to; half of them are left out in every rotation. */
export const PARTS = 8;

const STEP = Math.SQRT2;
const FINE_STEP = 2 ** 0.25;
const LEAST = 0.75; // knot spacings: below, a window holds hardly more than one knot
const MOST = 1; // widths of the box: wider windows make the same line
const AXIS_STEPS = [0.5, Math.SQRT1_2, Math.SQRT2, 2, 4];

/**
 * Chooses a field's bandwidth.
 *
 * @param residuals  per part of the blocks: moment vectors less what the other fields explain, shape (K, Z, T)
 * @param start  bandwidth per axis to search around, length
 * @returns bandwidth per axis, length
 */
export function chooseBandwidth(
  moments: BinnedMoments,
  field: LocalField,
  residuals: readonly Float64Array[],
  grid: KernelGrid,
  windows: KnotWindows,
  start: readonly number[],
): number[] {
  const score = crossValidation(moments, field, residuals, grid, windows);
  const limit = (bandwidth: readonly number[]): number[] =>
    bandwidth.map((width, axis) => {
      const most = grid.periods[axis] > 0 ? WIDEST_ON_PERIOD * grid.periods[axis] : MOST * grid.widths[axis];
      return Math.max(LEAST * grid.spacing[axis], Math.min(most, width));
    });
  const scaled = (factor: number): number[] => limit(start.map((width) => width * factor));
  let best = { bandwidth: scaled(1), score: Infinity };
  const seen = new Set<string>();
  const consider = (bandwidth: number[]): boolean => {
    const key = bandwidth.join();
    if (seen.has(key)) return true;
    seen.add(key);
    const value = score(bandwidth);
    if (value < best.score) best = { bandwidth, score: value };
    return false;
  };
  for (const direction of [1, -1]) {
    for (let step = direction > 0 ? 0 : -1; Math.abs(step) < 24; step += direction) {
      if (consider(scaled(STEP ** step))) break; // both ends of the range repeat themselves
    }
  }
  const common = best.bandwidth;
  if (grid.dimensions > 1) {
    // Each axis by itself from the common start, then together, so that no axis comes first.
    const singles = common.map((_, axis) => {
      let own = { factor: 1, score: best.score };
      for (const factor of AXIS_STEPS) {
        const value = score(limit(common.map((width, other) => (other === axis ? width * factor : width))));
        if (value < own.score) own = { factor, score: value };
      }
      return own;
    });
    consider(limit(common.map((width, axis) => width * singles[axis].factor)));
    singles.forEach(({ factor }, axis) =>
      consider(limit(common.map((width, other) => (other === axis ? width * factor : width)))),
    );
  }
  const coarse = best.bandwidth;
  for (const factor of [FINE_STEP, 1 / FINE_STEP]) consider(limit(coarse.map((width) => width * factor)));
  const toAll = 0.5 ** (1 / (4 + grid.dimensions));
  return limit(best.bandwidth.map((width) => width * toAll));
}

/** Returns the function that scores a bandwidth by the moments of the halves left out. */
function crossValidation(
  moments: BinnedMoments,
  field: LocalField,
  residuals: readonly Float64Array[],
  grid: KernelGrid,
  windows: KnotWindows,
): (bandwidth: readonly number[]) => number {
  const { instruments, targets, folds } = moments;
  const gram = gatherGram(moments, field);
  const groups = groupComponents(field, instruments);
  const totals = groups.map((group) => sumRows(moments, moments.total.matrix, group, grid));
  const all = gatherMoments(field, addArrays(residuals), instruments, targets);
  const halves = folds.map((_, first) => {
    const out = Array.from({ length: Math.ceil(folds.length / 2) }, (__, i) => (first + i) % folds.length);
    const matrix = addArrays(out.map((part) => folds[part].matrix));
    const vector = addArrays(out.map((part) => residuals[part]));
    const seen = gatherMoments(field, vector, instruments, targets);
    return {
      matrix,
      vector,
      training: all.map((value, i) => value - seen[i]),
      sums: groups.map((group, g) => withoutRows(totals[g], sumRows(moments, matrix, group, grid))),
    };
  });
  return (bandwidth) => {
    const widths = field.varies ? spreadBandwidth(windows, bandwidth, grid) : null;
    let score = 0;
    for (const { matrix, vector, training, sums } of halves) {
      const values = smooth(smootherOf(field, groups, sums, grid, windows, widths), training);
      const left = explainAway(moments, [field], [values], vector, field, matrix);
      const rest = gatherMoments(field, left, instruments, targets);
      for (let i = 0; i < rest.length; i++) if (gram[i] > 0) score += rest[i] ** 2 / gram[i];
    }
    return score;
  };
}

function addArrays(arrays: readonly Float64Array[]): Float64Array {
  return arrays[0].map((_, i) => arrays.reduce((sum, array) => sum + array[i], 0));
}

/** Sum of squared instruments behind each moment of a field, shape (components, K). */
function gatherGram(moments: BinnedMoments, field: LocalField): Float64Array {
  const { size, instruments, gram } = moments;
  const out = new Float64Array(field.components.length * size);
  field.components.forEach((terms, component) => {
    for (const [, instrument] of terms) {
      for (let knot = 0; knot < size; knot++)
        out[component * size + knot] += gram[knot * instruments + instrument];
    }
  });
  return out;
}

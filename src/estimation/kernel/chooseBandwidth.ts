/**
 * The bandwidth of one field by block cross-validation: estimated from half of the blocks, it shall explain the moments
 * of the other half. Leaving out that much makes the choice far steadier than leaving out a tenth; as the half data want
 * a wider window, the choice is scaled to all of them by (1/2)^{1/(4+d)}.
 *
 * The search goes up and down from the start in half octaves with the axes in fixed proportion, lets each axis differ, and
 * ends at the bottom of a parabola.
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

const STEP = 0.5; // octaves
const FINE_STEP = 0.25;
const LEAST = 0.75; // knot spacings: below, a window holds hardly more than one knot
const MOST = 1; // widths of the box: wider windows make the same line
const AXIS_FACTORS = [0.5, Math.SQRT1_2, Math.SQRT2, 2, 4];

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
  const judge = crossValidation(moments, field, residuals, grid, windows);
  const limit = (bandwidth: readonly number[]): number[] =>
    bandwidth.map((width, axis) => {
      const most = grid.periods[axis] > 0 ? WIDEST_ON_PERIOD * grid.periods[axis] : MOST * grid.widths[axis];
      return Math.max(LEAST * grid.spacing[axis], Math.min(most, width));
    });
  const known = new Map<string, number>();
  const score = (bandwidth: readonly number[]): number => {
    const key = bandwidth.join();
    const value = known.get(key) ?? judge(bandwidth);
    known.set(key, value);
    return value;
  };
  const better = (left: readonly number[], right: readonly number[]): readonly number[] =>
    score(right) < score(left) ? right : left;
  const scaled = (base: readonly number[], octaves: number): number[] =>
    limit(base.map((width) => width * 2 ** octaves));

  const origin = limit(start);
  let best: readonly number[] = origin;
  for (const direction of [STEP, -STEP]) {
    let last = origin;
    for (let octaves = direction; ; octaves += direction) {
      const next = scaled(origin, octaves);
      if (next.every((width, axis) => width === last[axis])) break; // the end of the range on every axis
      best = better(best, next);
      last = next;
    }
  }
  if (grid.dimensions > 1) {
    // Each axis by itself from the common start, then together, so that no axis comes first.
    const common = best;
    const changed = (factors: readonly number[]): number[] =>
      limit(common.map((width, axis) => width * factors[axis]));
    const singles = common.map((_, axis) =>
      AXIS_FACTORS.map((factor) => changed(common.map((__, other) => (other === axis ? factor : 1)))).reduce<
        readonly number[]
      >(better, common),
    );
    const together = singles.map((single, axis) => single[axis]);
    best = [together, ...singles].reduce(better, common);
  }
  return scaled(best, bottomOf((octaves) => score(scaled(best, octaves))) - 1 / (4 + grid.dimensions));
}

/** The bottom of the parabola through three scores a fine step apart, around the lowest of them; in octaves. */
function bottomOf(score: (octaves: number) => number): number {
  let middle = 0;
  if (score(-FINE_STEP) < score(middle)) middle = -FINE_STEP;
  if (score(FINE_STEP) < score(middle)) middle = FINE_STEP;
  const [left, centre, right] = [-FINE_STEP, 0, FINE_STEP].map((offset) => score(middle + offset));
  const curvature = left - 2 * centre + right;
  if (!(left >= centre && right >= centre && curvature > 0)) return middle;
  return middle + (FINE_STEP * (left - right)) / (2 * curvature);
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

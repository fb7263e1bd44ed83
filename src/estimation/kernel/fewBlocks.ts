/**
 * How much each block says at each knot: its leverage is the weight of its rows in the estimate there, as in a plain
 * regression on as many rows. What follows from it: see `blockShares`.
 */

import { judgeShares, leverageFactor } from '../blockShares.js';
import type { BinnedMoments } from './BinnedMoments.js';
import { createFieldSmoother, type FieldSmoother } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import type { LocalField } from './localFields.js';
import { ROUGH_TOLERANCE, solveFields } from './solveFields.js';
import type { KnotWindows } from './windows.js';

/** How much the blocks say at each knot. */
export interface BlockShares {
  /** Shape (B, K): 1/(1 − leverage). */
  readonly leverageFactors: Float64Array;
  /** Length K: degrees of freedom of the spread between blocks. */
  readonly freedom: Float64Array;
  /** Length K: ratio of Student's quantiles. */
  readonly widening: Float64Array;
  /** Length K: standard deviation of the estimate for uncorrelated rows of unit variance. */
  readonly designDeviations: Float64Array;
}

/**
 * What the blocks say for one field.
 *
 * @param bandwidth  per axis, length; null for a global average
 * @param blockCounts  per block, length K: rows that each knot stands for
 */
export function measureShares(
  grid: KernelGrid,
  windows: KnotWindows,
  bandwidth: readonly number[] | null,
  blockCounts: readonly Float64Array[],
): BlockShares {
  const { size } = grid;
  const blocks = blockCounts.length;
  const field: LocalField = { name: 'noise', varies: bandwidth !== null, components: [[[0, 0]]] };
  const moments = momentsOfCounts(blockCounts);
  const smoother = createFieldSmoother(moments, field, grid, windows, bandwidth ?? []);
  const leverages = blockCounts.map(
    (counts) => solveFields(moments, [smoother], counts, ROUGH_TOLERANCE).values[0],
  );
  const leverageFactors = new Float64Array(blocks * size);
  const freedom = new Float64Array(size);
  const widening = new Float64Array(size);
  for (let knot = 0; knot < size; knot++) {
    const shares = leverages.map((leverage) => leverage[knot]);
    const judged = judgeShares(shares);
    freedom[knot] = judged.freedom;
    widening[knot] = judged.widening;
    shares.forEach((share, block) => (leverageFactors[block * size + knot] = leverageFactor(share)));
  }
  return { leverageFactors, freedom, widening, designDeviations: measureDesign(moments, smoother) };
}

/** Standard deviation per knot for rows of unit variance: root of Σ counts · weights², weights from unit moments. */
function measureDesign(moments: BinnedMoments, smoother: FieldSmoother): Float64Array {
  const { size, counts } = moments;
  const variances = new Float64Array(size);
  const unit = new Float64Array(size);
  for (let bin = 0; bin < size; bin++) {
    if (counts[bin] === 0) continue;
    unit[bin] = 1;
    const [weights] = solveFields(moments, [smoother], unit).values;
    unit[bin] = 0;
    for (let knot = 0; knot < size; knot++) variances[knot] += counts[bin] * weights[knot] ** 2;
  }
  return variances.map(Math.sqrt);
}

/** A plain regression with as many rows at each knot. */
function momentsOfCounts(blockCounts: readonly Float64Array[]): BinnedMoments {
  const counts = blockCounts[0].map((_, knot) => blockCounts.reduce((sum, own) => sum + own[knot], 0));
  const knots = Int32Array.from(counts, (_, knot) => knot);
  const total = { matrix: counts, vector: counts };
  return {
    size: counts.length,
    instruments: 1,
    targets: 1,
    rows: knots,
    columns: knots,
    folds: [total],
    total,
    gram: counts,
    counts,
  };
}

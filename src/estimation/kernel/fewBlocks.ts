/**
 * What the effect of a block has to be multiplied by where few blocks carry an estimate. There the residuals of a block
 * are small because the estimate follows that block, and the standard deviation over so few blocks is itself uncertain:
 * intervals as for many blocks would be too narrow.
 *
 * With H_b the leverage of block b at a place (the weight of its rows in the estimate; ΣH_b = 1), effects grow by
 * 1/(1 − H_b), which is what leaving the block out would show, and by the ratio of Student's quantiles for the freedom
 * 1/ΣH_b² − 1 of the place and B − 1 of the whole. Where B blocks share the weight equally both are 1 up to 1/B.
 *
 * Source  Bell & McCaffrey, Bias reduction in standard errors for linear regression with multi-stage samples, Survey
 *         Methodology 28 (2002) 169; Imbens & Kolesár, Robust standard errors in small samples, Rev. Econ. Stat. 98 (2016)
 *         701. Here the weights are those of a plain regression on as many rows.
 */

import { studentQuantile } from '../../numerics/special/student.js';
import type { BinnedMoments } from './BinnedMoments.js';
import { createFieldSmoother, type FieldSmoother } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import type { LocalField } from './localFields.js';
import { ROUGH_TOLERANCE, solveFields } from './solveFields.js';
import type { KnotWindows } from './windows.js';

const TAIL = 0.975; // the quantile at which the intervals are exact; the ratio changes little around it
const LARGEST_LEVERAGE = 0.95;
const LEAST_FREEDOM = 2; // below, the law of t has no variance and says little more than that nothing is known

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
  const usual = studentQuantile(TAIL, Math.max(1, blocks - 1));
  const leverageFactors = new Float64Array(blocks * size);
  const freedom = new Float64Array(size);
  const widening = new Float64Array(size);
  for (let knot = 0; knot < size; knot++) {
    let squares = 0;
    leverages.forEach((leverage, block) => {
      squares += leverage[knot] ** 2;
      const own = Math.max(0, Math.min(LARGEST_LEVERAGE, leverage[knot]));
      leverageFactors[block * size + knot] = 1 / (1 - own);
    });
    freedom[knot] = Math.max(LEAST_FREEDOM, 1 / squares - 1);
    widening[knot] = Math.max(1, studentQuantile(TAIL, freedom[knot]) / usual);
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

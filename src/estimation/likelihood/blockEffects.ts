/**
 * First-order effects of blocks on the parameters, as the bootstrap takes them.
 *
 * Where few blocks carry a function, their scores at the estimate are small because the estimate follows them, and the
 * spread of so few is itself uncertain. With H_b the share of block b in the information about a parameter, its effect
 * grows by 1/(1 − H_b), what leaving it out would show, and all effects by the ratio of Student's quantiles for the
 * freedom 1/ΣH_b² − 1 that is left there and B − 1 of the whole. Where all blocks are everywhere both are one to 1/B.
 *
 * Source  Bell & McCaffrey, Survey Methodology 28 (2002) 169; Imbens & Kolesár, Rev. Econ. Stat. 98 (2016) 701.
 */

import { Matrix } from 'ml-matrix';
import { studentQuantile } from '../../numerics/special/student.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting } from './PathPass.js';
import type { ScoringSolution } from './scoring.js';

const TAIL = 0.975; // the quantile at which intervals are exact; the ratio changes little around it
const LARGEST_SHARE = 0.95;
const LEAST_FREEDOM = 2;

/** (I + S)⁻¹ s_b for every block, made larger where few of them carry a parameter; shape (B, p). */
export function blockEffects(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  { blockOfPosition, blocks }: PassSetting,
  solution: ScoringSolution,
): Float64Array {
  const p = layout.size;
  const { scores, inverse } = solution;
  const effects = Float64Array.from(
    Matrix.from1DArray(blocks, p, scores)
      .mmul(Matrix.from1DArray(p, p, inverse))
      .to1DArray(),
  );
  const usual = studentQuantile(TAIL, Math.max(1, blocks - 1));
  const shares = new Float64Array(blocks);
  const enlarge = (parameter: number): void => {
    let squares = 0;
    for (const share of shares) squares += share * share;
    const freedom = Math.max(LEAST_FREEDOM, 1 / squares - 1);
    const widening = Math.max(1, studentQuantile(TAIL, freedom) / usual);
    for (let block = 0; block < blocks; block++)
      effects[block * p + parameter] *= widening / (1 - Math.min(LARGEST_SHARE, shares[block]));
  };

  const visits = layout.bases.map((_, b) => shareVisits(tracks, layout, b, blockOfPosition, blocks));
  for (const slot of [layout.force, layout.friction, layout.noise]) {
    if (!slot || slot.basis < 0) continue;
    for (let component = 0; component < slot.components; component++) {
      const offset = slot.offset + component * slot.functionCount;
      for (let i = 0; i < slot.functionCount; i++) {
        gatherShares(visits[slot.basis], solution, p, offset, i, slot.functionCount, shares);
        enlarge(offset + i);
      }
    }
  }
  if (layout.errorOffset < 0) return effects;
  shares.fill(0);
  for (const block of blockOfPosition) shares[block] += 1 / blockOfPosition.length;
  for (let i = layout.errorOffset; i < p; i++) enlarge(i);
  return effects;
}

/** Share of each block in the visits to each function, shape (B, k). */
function shareVisits(
  { positions, dimensions: d }: TrackSet,
  layout: LikelihoodLayout,
  b: number,
  blockOfPosition: Int32Array,
  blocks: number,
): Float64Array {
  const basis = layout.bases[b];
  const k = basis.functionCount;
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const visits = new Float64Array(blocks * k);
  const totals = new Float64Array(k);
  for (let row = 0; row < blockOfPosition.length; row++) {
    const count = basis.evaluateInto(positions, row * d, indices, values);
    for (let i = 0; i < count; i++) {
      const weight = values[i] * values[i];
      visits[blockOfPosition[row] * k + indices[i]] += weight;
      totals[indices[i]] += weight;
    }
  }
  return visits.map((value, i) => (totals[i % k] > 0 ? value / totals[i % k] : 0));
}

/** Share of each block in the variance of a parameter: that of its own field's functions, as they weigh on it. */
function gatherShares(
  visits: Float64Array,
  { inverse, information }: ScoringSolution,
  p: number,
  offset: number,
  i: number,
  k: number,
  shares: Float64Array,
): void {
  shares.fill(0);
  let sum = 0;
  for (let j = 0; j < k; j++) {
    const at = offset + j;
    const weight = inverse[(offset + i) * p + at] ** 2 * information[at * p + at];
    sum += weight;
    for (let block = 0; block < shares.length; block++) shares[block] += weight * visits[block * k + j];
  }
  for (let block = 0; block < shares.length; block++)
    shares[block] = sum > 0 ? shares[block] / sum : 1 / shares.length;
}

/**
 * First-order effects of blocks on the parameters, as the bootstrap takes them: larger where few blocks carry a parameter
 * (see `blockShares`). The share of a block is that in the information of the parameter's own field, as its functions
 * weigh on the parameter.
 */

import { multiply } from '../../numerics/linear/denseMatrix.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import { judgeShares, leverageFactor } from '../blockShares.js';
import type { LikelihoodLayout } from './layout.js';
import type { PassSetting } from './PathPass.js';
import type { ScoringSolution } from './scoring.js';

const LARGEST = 1.5; // standard deviation by the model up to which effects are enlarged

/**
 * R s_b for every block, made larger where few of them carry a parameter; shape (B, p).
 *
 * @param response  R, shape (p, p): (I + S)⁻¹ or better
 */
export function blockEffects(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  { blockOfPosition, blocks }: PassSetting,
  solution: ScoringSolution,
  response: Float64Array,
): Float64Array {
  const p = layout.size;
  const { scores, inverse } = solution;
  const effects = multiply(scores, response, blocks, p, p);
  const shares = new Float64Array(blocks);
  const enlarge = (parameter: number): void => {
    const before = sizeOf(effects, parameter, p);
    const { widening } = judgeShares(shares);
    for (let block = 0; block < blocks; block++)
      effects[block * p + parameter] *= widening * leverageFactor(shares[block]);
    // Where hardly any block has been, factors say nothing: what the model makes of it is the measure.
    const after = sizeOf(effects, parameter, p);
    const most = Math.max(before, LARGEST * Math.sqrt(inverse[parameter * p + parameter]));
    if (after <= most) return;
    for (let i = parameter; i < effects.length; i += p) effects[i] *= most / after;
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

/** Standard deviation of a parameter over blocks. */
function sizeOf(effects: Float64Array, parameter: number, p: number): number {
  let squares = 0;
  for (let i = parameter; i < effects.length; i += p) squares += effects[i] * effects[i];
  return Math.sqrt(squares);
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

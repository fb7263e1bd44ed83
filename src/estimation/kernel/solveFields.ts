/**
 * All fields of a regression together, each with its own bandwidth: every field in turn is smoothed from what the others
 * leave of the moments, until none changes any more. Smoothers with instruments are not symmetric, and the plain iteration
 * may run away; it is accelerated in a way that also finds fixed points that repel (`FixedPointAccelerator`).
 *
 * Smoothing flattens peaks and fills valleys. What it takes away from a coefficient, it takes away again when the estimate
 * itself is smoothed; so the part of the moments that the smoothed field fails to explain is smoothed once more and added,
 * three times over. That leaves a bias of eighth order in the bandwidth instead of second, at the price of more scatter, which the
 * intervals contain because the correction is linear in the data like everything else.
 *
 * Source  backfitting: Buja, Hastie & Tibshirani, Linear smoothers and additive models, Ann. Statist. 17 (1989) 453;
 *         correction: Stuetzle & Mittal, Some comments on the asymptotic behavior of robust smoothers, in Smoothing
 *         Techniques for Curve Estimation (1979) 176 ("twicing"); more than once: Di Marzio & Taylor, On boosting kernel
 *         regression, J. Stat. Plan. Inference 138 (2008) 2483.
 */

import { type BinnedMoments, subtractExplained } from './BinnedMoments.js';
import { type FieldSmoother, smooth } from './fieldSmoother.js';
import { FixedPointAccelerator } from './FixedPointAccelerator.js';
import { addCoefficients, gatherMoments, instrumentsOf, type LocalField } from './localFields.js';

export interface FieldValues {
  /** Per field: values at the knots, shape (components, K). */
  readonly values: readonly Float64Array[];
  readonly converged: boolean;
}

/**
 * With one, intervals still miss the top of a bump a few bandwidths wide. Three leave a bias of eighth order: cross-validation
 * picks a window twice too wide now and then, and the intervals have to cover the truth then too.
 */
const CORRECTIONS = 3;

const ROUNDS = 60;
const TOLERANCE = 1e-9; // far below the scatter of any estimate, and below what the localization variance settles to

/** Enough for the effect of a block, of which only the size over all blocks matters. */
export const ROUGH_TOLERANCE = 1e-3;

/**
 * Solves for all fields.
 *
 * @param vector  moment vectors to explain, shape (K, Z, T): those of the data, or the change that a block makes
 * @param tolerance  largest change of a field in a round, relative to its largest value, at which the rounds end
 */
export function solveFields(
  moments: BinnedMoments,
  smoothers: readonly FieldSmoother[],
  vector: Float64Array,
  tolerance = TOLERANCE,
): FieldValues {
  const fields = smoothers.map(({ field }) => field);
  const values: Float64Array[] = fields.map(
    (field) => new Float64Array(field.components.length * moments.size),
  );
  const others = <T>(items: readonly T[], index: number): T[] => items.filter((_, i) => i !== index);
  /** Smooths every field in turn from what the others leave, in place. */
  const sweep = (): void =>
    smoothers.forEach((smoother, index) => {
      const left = explainAway(moments, others(fields, index), others(values, index), vector, fields[index]);
      values[index] = smoothAndCorrect(moments, smoother, left);
    });
  if (fields.length < 2) {
    sweep();
    return { values, converged: true };
  }
  const accelerator = new FixedPointAccelerator();
  let converged = false;
  for (let round = 0; round < ROUNDS && !converged; round++) {
    const before = values.map((value) => value.slice());
    sweep();
    const change = Math.max(...values.map((value, index) => relativeChange(value, before[index])));
    converged = change <= tolerance;
    if (!converged) accelerator.advance(before, values);
  }
  return { values, converged };
}

/** Smooths, and smooths what that leaves unexplained; an average over everything has no bias to correct. */
function smoothAndCorrect(
  moments: BinnedMoments,
  smoother: FieldSmoother,
  vector: Float64Array,
): Float64Array {
  const { instruments, targets } = moments;
  const { field } = smoother;
  let values = smooth(smoother, gatherMoments(field, vector, instruments, targets));
  for (let round = 0; round < CORRECTIONS && field.varies; round++) {
    const rest = explainAway(moments, [field], [values], vector, field);
    const more = smooth(smoother, gatherMoments(field, rest, instruments, targets));
    values = values.map((value, i) => value + more[i]);
  }
  return values;
}

/**
 * Moment vectors less what some fields explain of them.
 *
 * @param wanted  the field whose moments are asked for; those of others are left as they are
 */
export function explainAway(
  moments: BinnedMoments,
  fields: readonly LocalField[],
  values: readonly Float64Array[],
  vector: Float64Array,
  wanted: LocalField,
  matrix: Float64Array = moments.total.matrix,
): Float64Array {
  const out = vector.slice();
  if (fields.length === 0) return out;
  const coefficients = new Float64Array(vector.length);
  fields.forEach((field, index) => {
    addCoefficients(field, values[index], coefficients, moments.instruments, moments.targets);
  });
  const from = fields.flatMap(instrumentsOf);
  subtractExplained(moments, matrix, coefficients, from, instrumentsOf(wanted), out);
  return out;
}

function relativeChange(next: Float64Array, last: Float64Array): number {
  let size = 0;
  let change = 0;
  for (let i = 0; i < next.length; i++) {
    size = Math.max(size, Math.abs(next[i]));
    change = Math.max(change, Math.abs(next[i] - last[i]));
  }
  return size > 0 ? change / size : 0;
}

/**
 * The kernel estimator: no basis is presumed. Force and friction (or drift), then noise (or diffusion), by local linear
 * regression of the same finite differences, with the same lagged instruments, long-run variances and corrections for the
 * interval as the differences estimator; linear in the number of positions, because moments are binned to a grid first.
 *
 * Bandwidths are chosen by block cross-validation, one per axis for each coefficient. The smoothing bias is corrected
 * explicitly (`solveFields`): estimate and intervals are those of the corrected estimate, so that intervals cover the
 * coefficient and not its smoothed version. Nothing is undersmoothed on purpose.
 *
 * Of the shapes in the plan, `zero` and `constant` keep their meaning (constant: one global average); every other one
 * stands for a field that may vary freely with place.
 */

import type { Warning } from '../../errors.js';
import { withParameters } from '../../fields/modelParameters.js';
import type { TrackSet } from '../../tracks/TrackSet.js';
import { describeVisited } from '../../tracks/visitedRegion.js';
import {
  describeError,
  type ErrorVariance,
  firstOrderError,
  joined,
  templateModel,
  UNCONVERGED,
} from '../differences/estimateDifferences.js';
import { checkSecondOrderRuns } from '../differences/residuals.js';
import type { Estimate, EstimationPlan, FieldPlan } from '../Estimate.js';
import { createKnotCorrection } from './correctAtKnots.js';
import { estimateMotion, type MotionEstimate } from './estimateMotion.js';
import { estimateNoise } from './estimateNoise.js';
import { createKernelGrid, type KernelGrid } from './grid.js';

/**
 * Estimates the model by local linear regression.
 *
 * @param plan  `noise.basis` must not be null
 * @throws DataError  where the tracks have no stretch long enough
 */
export function estimateKernel(tracks: TrackSet, plan: EstimationPlan): Estimate {
  const { dimensions: d, samplingInterval } = tracks;
  if (!plan.noise.basis) throw new TypeError('the noise needs a basis');
  const second = plan.order === 'second';
  if (second) checkSecondOrderRuns(tracks);
  const grid = createKernelGrid(tracks, describeVisited(tracks));
  const local: EstimationPlan = {
    ...plan,
    force: localize(plan.force, grid),
    friction: localize(plan.friction, grid),
    noise: localize(plan.noise, grid),
  };
  const hasMotion = local.force.basis !== null || (second && local.friction.basis !== null);
  const motion = hasMotion ? estimateMotion(tracks, local, grid) : NO_MOTION;
  const noise = estimateNoise(tracks, local, grid, motion);
  const localization = localizationOf(tracks, plan, motion, noise.errorSums);

  const parameters = joined(motion.parameters, noise.parameters);
  const model = templateModel(tracks, local);
  const zero = second
    ? [local.force.basis === null, local.friction.basis === null, false]
    : [local.force.basis === null, false];
  const correction = createKnotCorrection(
    grid,
    model,
    zero,
    noise.counts,
    localization.variance,
    samplingInterval,
  );
  const warnings: Warning[] = [...(motion.converged ? [] : [UNCONVERGED]), ...warnOfShapes(plan)];
  return {
    model: withParameters(model, correction.correct(parameters)),
    parameters,
    influences: joinBlocks(motion.effects, noise.effects, plan.blocks.count),
    smoothingFactor: null,
    toModelParameters: (raw) => correction.correct(raw),
    localizationError: describeError(localization, plan, d),
    diagnostics: {
      estimator: 'kernel',
      converged: motion.converged,
      parameters: parameters.length,
      knots: grid.size,
      smoothingBias:
        'corrected explicitly: what the smoothed fields leave unexplained is smoothed once more and added',
      ...named('Bandwidth', { ...motion.bandwidths, ...noise.bandwidths }),
      ...named('PlugInBandwidth', { ...motion.starts, ...noise.starts }),
    },
    warnings,
  };
}

const NO_MOTION: MotionEstimate = {
  parameters: new Float64Array(0),
  influences: new Float64Array(0),
  effects: new Float64Array(0),
  errorVariance: null,
  errorInfluences: null,
  bandwidths: {},
  starts: {},
  counts: new Float64Array(0),
  converged: true,
};

function localize(field: FieldPlan, grid: KernelGrid): FieldPlan {
  const { basis } = field;
  if (basis === null || basis.kind === 'constant') return field;
  if (basis.kind === 'polynomial' && basis.degree === 0) return { ...field, basis: { kind: 'constant' } };
  return { ...field, basis: grid.spec };
}

function localizationOf(
  tracks: TrackSet,
  plan: EstimationPlan,
  motion: MotionEstimate,
  errorSums: Parameters<typeof firstOrderError>[0] | null,
): ErrorVariance {
  if (motion.errorVariance && motion.errorInfluences)
    return { variance: motion.errorVariance, influences: motion.errorInfluences };
  if (errorSums) return firstOrderError(errorSums, plan, tracks.dimensions);
  const none = new Float64Array(tracks.dimensions);
  return {
    variance: Float64Array.from(plan.localizationError ?? none, (s) => s * s),
    influences: new Float64Array(plan.blocks.count * tracks.dimensions),
  };
}

/** Effects of the blocks on both regressions, side by side. */
function joinBlocks(left: Float64Array, right: Float64Array, blocks: number): Float64Array {
  const p1 = left.length / blocks;
  const p2 = right.length / blocks;
  const out = new Float64Array(left.length + right.length);
  for (let block = 0; block < blocks; block++) {
    out.set(left.subarray(block * p1, (block + 1) * p1), block * (p1 + p2));
    out.set(right.subarray(block * p2, (block + 1) * p2), block * (p1 + p2) + p1);
  }
  return out;
}

function named(
  suffix: string,
  values: Readonly<Record<string, readonly number[]>>,
): Record<string, readonly number[]> {
  return Object.fromEntries(Object.entries(values).map(([name, value]) => [`${name}${suffix}`, value]));
}

/** Shapes that would mean something else to another estimator are not passed over in silence. */
function warnOfShapes(plan: EstimationPlan): Warning[] {
  const shaped = [plan.force, plan.friction, plan.noise].some(
    ({ basis }) => (basis?.kind === 'polynomial' && basis.degree > 0) || basis?.kind === 'waves',
  );
  if (!shaped) return [];
  return [
    {
      code: 'shape-taken-as-local',
      message:
        'the kernel estimator presumes no shape: polynomials and waves are taken as coefficients that vary freely with place; take --estimator differences for them',
    },
  ];
}

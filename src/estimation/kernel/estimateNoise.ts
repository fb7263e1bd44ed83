/**
 * Noise (second order) or diffusion (first order) by local linear regression of products of residuals, with the effect
 * of every block: its own products, and what it does to all residuals through force and friction.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import { driftBasis, type ErrorSums } from '../differences/firstOrder.js';
import { layOutSecondOrder } from '../differences/forceFriction.js';
import { noisePairs } from '../differences/residualProducts.js';
import type { EstimationPlan } from '../Estimate.js';
import { chooseBandwidth, PARTS } from './chooseBandwidth.js';
import type { MotionEstimate } from './estimateMotion.js';
import { createFieldSmoother } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import { noiseField } from './localFields.js';
import {
  collectNoiseMoments,
  collectNoiseResiduals,
  firstOrderRows,
  type NoiseRows,
  secondOrderRows,
} from './noiseMoments.js';
import { createNoiseWindows } from './noiseWindows.js';
import { type PlugInData, startBandwidth } from './plugInStart.js';
import { reportEffects } from './reportEffects.js';
import { solveFields } from './solveFields.js';

export interface NoiseEstimate {
  /** Per component: K values, or one where the field does not vary. */
  readonly parameters: Float64Array;
  /** Shape (B, p₂): effects of the blocks as they are reported. */
  readonly effects: Float64Array;
  readonly bandwidths: Readonly<Record<string, readonly number[]>>;
  readonly starts: Readonly<Record<string, readonly number[]>>;
  /** Length K: rows that each knot stands for. */
  readonly counts: Float64Array;
  /** First order only. */
  readonly errorSums: ErrorSums | null;
}

/**
 * Estimates noise or diffusion from the residuals of the motion.
 *
 * @param plan  with the grid's basis, a constant one or none for each field
 */
export function estimateNoise(
  tracks: TrackSet,
  plan: EstimationPlan,
  grid: KernelGrid,
  motion: MotionEstimate,
): NoiseEstimate {
  const { dimensions: d } = tracks;
  const { count: blocks } = plan.blocks;
  const second = plan.order === 'second';
  const pairs = noisePairs(plan.noise.form, d);
  const components = pairs.length;
  const field = noiseField(second ? 'noise' : 'diffusion', plan.noise.basis?.kind === 'spline', components);
  const first = second ? null : firstOrderRows(tracks, plan, driftBasis(plan, d), motion.parameters);
  const rows: NoiseRows =
    first?.rows ?? secondOrderRows(tracks, plan.noise.form, layOutSecondOrder(plan, d), motion.parameters);
  const p1 = motion.parameters.length;
  const { moments, sensitivity } = collectNoiseMoments(tracks, plan, grid, rows, p1, Math.min(PARTS, blocks));
  const start = field.varies ? startBandwidth(grid, moments, plugInData(tracks, rows)) : [];
  const diagonal = pairs.flatMap(([[a, b]], component) => (a === b ? [component] : []));
  const { windows, moments: weighted } = createNoiseWindows(moments, field, diagonal, grid, start);
  const residualsOfFolds = moments.folds.map((fold) => fold.vector);
  const bandwidth = field.varies
    ? chooseBandwidth(weighted, field, residualsOfFolds, grid, windows, start)
    : [];
  const smoothers = [createFieldSmoother(moments, field, grid, windows, bandwidth)];
  const [values] = solveFields(moments, smoothers, moments.total.vector).values;
  const pack = (full: Float64Array): Float64Array =>
    field.varies ? full : full.filter((_, i) => i % grid.size === 0);

  const p2 = pack(values).length;
  const influences = new Float64Array(blocks * p2);
  const { residuals, counts } = collectNoiseResiduals(tracks, plan, grid, rows, values);
  residuals.forEach((vector, block) => {
    for (let component = 0; component < components; component++) {
      for (let knot = 0; knot < grid.size; knot++) {
        const base = (component * grid.size + knot) * p1;
        let moved = 0;
        for (let j = 0; j < p1; j++) moved += sensitivity[base + j] * motion.influences[block * p1 + j];
        vector[knot * components + component] += moved;
      }
    }
    influences.set(pack(solveFields(moments, smoothers, vector).values[0]), block * p2);
  });
  return {
    parameters: pack(values),
    effects: reportEffects(
      [{ components, bandwidth: field.varies ? bandwidth : null }],
      influences,
      grid,
      windows,
      counts,
    ),
    bandwidths: field.varies ? { [field.name]: bandwidth } : {},
    starts: field.varies ? { [field.name]: start } : {},
    counts: moments.counts,
    errorSums: first?.errors ?? null,
  };
}

/** In one dimension: the products of residuals by place. */
function plugInData(tracks: TrackSet, rows: NoiseRows): PlugInData | null {
  if (tracks.dimensions > 1) return null;
  const places: number[] = [];
  const responses: number[] = [];
  rows.visit((row, products) => {
    places.push(tracks.positions[row]);
    responses.push(products.responses[0]);
  });
  return { places, responses };
}

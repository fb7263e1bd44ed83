/**
 * Force and friction (second order) or drift (first order) by local linear regression, with the effect of every block.
 */

import type { TrackSet } from '../../tracks/TrackSet.js';
import { layOutSecondOrder, type SecondOrderLayout } from '../differences/forceFriction.js';
import { collectErrorMoments } from '../differences/residuals.js';
import { joinInfluences, settleErrorVariance } from '../differences/solveForceFriction.js';
import type { EstimationPlan } from '../Estimate.js';
import type { BinnedMoments } from './BinnedMoments.js';
import { chooseBandwidth, PARTS } from './chooseBandwidth.js';
import { createFieldSmoother, type FieldSmoother } from './fieldSmoother.js';
import type { KernelGrid } from './grid.js';
import { addCoefficients, frictionField, type LocalField, vectorField } from './localFields.js';
import {
  collectBlockResiduals,
  collectMotionMoments,
  correctForError,
  designMotion,
  errorDerivatives,
  type MotionDesign,
  visitMotionRows,
} from './motionMoments.js';
import { type PlugInData, referenceBandwidth, startBandwidth } from './plugInStart.js';
import { reportEffects } from './reportEffects.js';
import { explainAway, ROUGH_TOLERANCE, solveFields } from './solveFields.js';
import { createWindows } from './windows.js';

export interface MotionEstimate {
  /** Force or drift per axis, then friction per component: K values each, or one where the field does not vary. */
  readonly parameters: Float64Array;
  /** Shape (B, p₁): first-order effects of the blocks. */
  readonly influences: Float64Array;
  /** Shape (B, p₁): the same as they are reported. */
  readonly effects: Float64Array;
  /** Second order: localization variance per axis and its influences, shape (B, d). */
  readonly errorVariance: Float64Array | null;
  readonly errorInfluences: Float64Array | null;
  readonly bandwidths: Readonly<Record<string, readonly number[]>>;
  readonly starts: Readonly<Record<string, readonly number[]>>;
  readonly counts: Float64Array;
  readonly converged: boolean;
}

/**
 * Estimates force and friction, or the drift.
 *
 * @param plan  with the grid's basis, a constant one or none for each field
 */
export function estimateMotion(tracks: TrackSet, plan: EstimationPlan, grid: KernelGrid): MotionEstimate {
  const { dimensions: d, samplingInterval } = tracks;
  const second = plan.order === 'second';
  const layout = layOutSecondOrder(plan, d);
  const design = designMotion(tracks, plan);
  const fields = planFields(plan, layout, d);
  const plain = collectMotionMoments(tracks, plan, design, grid, Math.min(PARTS, plan.blocks.count));
  const windows = createWindows(grid, plain.counts, referenceBandwidth(grid, plain.counts));
  const starts = fields.map((field) =>
    field.varies ? startBandwidth(grid, plain, plugInData(tracks, design, grid, field)) : [],
  );
  let bandwidths: readonly (readonly number[])[] = starts;

  const solve = (moments: BinnedMoments, chosen: boolean): Regression => {
    let smoothers = fields.map((field, i) =>
      createFieldSmoother(moments, field, grid, windows, bandwidths[i]),
    );
    let solution = solveFields(moments, smoothers, moments.total.vector);
    for (let i = 0; i < fields.length && !chosen; i++) {
      if (!fields[i].varies) continue;
      const others = fields.filter((_, other) => other !== i);
      const values = solution.values.filter((_, other) => other !== i);
      const residuals = moments.folds.map((fold) =>
        explainAway(moments, others, values, fold.vector, fields[i], fold.matrix),
      );
      const chosenWidth = chooseBandwidth(moments, fields[i], residuals, grid, windows, bandwidths[i]);
      bandwidths = bandwidths.map((width, other) => (other === i ? chosenWidth : width));
      smoothers = smoothers.map((smoother, other) =>
        other === i ? createFieldSmoother(moments, fields[i], grid, windows, chosenWidth) : smoother,
      );
      solution = solveFields(moments, smoothers, moments.total.vector);
    }
    return {
      moments,
      smoothers,
      values: solution.values,
      parameters: packParameters(fields, solution.values, grid.size),
      converged: solution.converged,
    };
  };

  let regression: Regression;
  let blockCounts: readonly Float64Array[];
  let result: Pick<MotionEstimate, 'influences' | 'errorVariance' | 'errorInfluences'>;
  let settled = true;
  if (second) {
    const given = plan.localizationError && Float64Array.from(plan.localizationError, (s) => s * s);
    let rounds = 0;
    const found = settleErrorVariance(
      given,
      design.lag,
      d,
      (variance, known) => {
        const moments = design.lag === 1 ? correctForError(plain, variance, samplingInterval) : plain;
        const rough = design.lag === 1 && given === null && rounds++ === 0; // not worth a choice of bandwidths yet
        return solve(moments, known || rough);
      },
      (parameters) => collectErrorMoments(tracks, plan, layout, parameters),
    );
    regression = found.regression;
    settled = found.converged;
    const coefficients = coefficientsOf(regression);
    const corrected = design.lag === 1 ? found.variance : null;
    const { residuals, counts } = collectBlockResiduals(tracks, plan, design, grid, coefficients, corrected);
    blockCounts = counts;
    const influences = blockInfluences(regression, fields, residuals);
    const shift = corrected && !given ? errorShift(regression, fields, coefficients, samplingInterval) : null;
    const joined = joinInfluences(
      { parameters: regression.parameters, influences },
      found.errors,
      found.variance,
      shift,
      given !== null,
      d,
    );
    result = { ...joined, errorVariance: found.variance };
  } else {
    regression = solve(plain, false);
    const coefficients = coefficientsOf(regression);
    const { residuals, counts } = collectBlockResiduals(tracks, plan, design, grid, coefficients, null);
    blockCounts = counts;
    result = {
      influences: blockInfluences(regression, fields, residuals),
      errorVariance: null,
      errorInfluences: null,
    };
  }
  const byName = (values: readonly (readonly number[])[]) =>
    Object.fromEntries(fields.flatMap(({ name, varies }, i) => (varies ? [[name, values[i]] as const] : [])));
  return {
    ...result,
    parameters: regression.parameters,
    effects: reportEffects(
      fields.map(({ components, varies }, i) => ({
        components: components.length,
        bandwidth: varies ? bandwidths[i] : null,
      })),
      result.influences,
      grid,
      windows,
      blockCounts,
    ),
    bandwidths: byName(bandwidths),
    starts: byName(starts),
    counts: plain.counts,
    converged: settled && regression.converged,
  };
}

interface Regression {
  readonly moments: BinnedMoments;
  readonly smoothers: readonly FieldSmoother[];
  readonly values: readonly Float64Array[];
  readonly parameters: Float64Array;
  readonly converged: boolean;
}

function planFields(plan: EstimationPlan, layout: SecondOrderLayout, d: number): LocalField[] {
  const fields: LocalField[] = [];
  const varies = (basis: { kind: string } | null): boolean => basis?.kind === 'spline';
  if (plan.force.basis)
    fields.push(vectorField(plan.order === 'second' ? 'force' : 'drift', varies(plan.force.basis), d));
  if (plan.order === 'second' && plan.friction.basis)
    fields.push(frictionField(layout.frictionForm, varies(plan.friction.basis), d));
  return fields;
}

/** K values per component of a field that varies, one of a field that does not; field after field. */
function packParameters(
  fields: readonly LocalField[],
  values: readonly Float64Array[],
  size: number,
): Float64Array {
  return Float64Array.from(
    fields.flatMap(({ varies }, i) =>
      Array.from(values[i]).filter((_, index) => varies || index % size === 0),
    ),
  );
}

function coefficientsOf({ moments, smoothers, values }: Regression): Float64Array {
  const coefficients = new Float64Array(moments.total.vector.length);
  smoothers.forEach(({ field }, i) =>
    addCoefficients(field, values[i], coefficients, moments.instruments, moments.targets),
  );
  return coefficients;
}

function blockInfluences(
  regression: Regression,
  fields: readonly LocalField[],
  residuals: readonly Float64Array[],
): Float64Array {
  const p = regression.parameters.length;
  const influences = new Float64Array(residuals.length * p);
  residuals.forEach((vector, block) => {
    const { values } = solveFields(regression.moments, regression.smoothers, vector, ROUGH_TOLERANCE);
    influences.set(packParameters(fields, values, regression.moments.size), block * p);
  });
  return influences;
}

/** Derivative of the parameters with respect to each axis' localization variance, shape (d, p₁). */
function errorShift(
  regression: Regression,
  fields: readonly LocalField[],
  coefficients: Float64Array,
  interval: number,
): Float64Array {
  return blockInfluences(regression, fields, errorDerivatives(regression.moments, coefficients, interval));
}

/** In one dimension: accelerations (or velocities) by place, or their products with the instrument for the friction. */
function plugInData(
  tracks: TrackSet,
  design: MotionDesign,
  grid: KernelGrid,
  field: LocalField,
): PlugInData | null {
  if (tracks.dimensions > 1) return null;
  const places: number[] = [];
  const responses: number[] = [];
  let strength = 0;
  visitMotionRows(tracks, design, grid, (row, _at, _seen, z, x, response) => {
    places.push(tracks.positions[row]);
    const ofFriction = field.name === 'friction';
    responses.push(ofFriction ? z[1] * response[0] : response[0]);
    if (ofFriction) strength += z[1] * x[1];
  });
  if (field.name === 'friction')
    for (let i = 0; i < responses.length; i++) responses[i] *= responses.length / strength;
  return { places, responses };
}

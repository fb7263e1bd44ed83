/**
 * The information a recording holds about the coefficients, as if they were constant around each position: Whittle's
 * information of the stationary series, laid on the basis functions that are not zero there. It is positive
 * semi-definite by construction, which the observed curvature is not, and costs no more than the normal equations of a
 * regression; Fisher scoring uses it as its metric.
 *
 * Force: h/N per position (second order), h/2D (first order). Between force and the rest there is none but through the
 * mean motion: where particles drift at u, the drift by friction −Γu tells of friction what a force does.
 *
 * Source  Whittle, Ark. Mat. 2 (1953) 423; Fisher scoring: Rao, Proc. Camb. Phil. Soc. 44 (1948) 50.
 */

import { createModelEvaluator } from '../../fields/evaluateModel.js';
import { withParameters } from '../../fields/modelParameters.js';
import { informationPerPosition } from '../../momenta/precisionBound.js';
import { countTracks, type TrackSet } from '../../tracks/TrackSet.js';
import { readErrorVariances } from './errorVariances.js';
import type { FieldSlot, LikelihoodLayout } from './layout.js';
import type { PassSetting } from './PathPass.js';

/** Writes the information of one position about (log friction, log noise, log error variance), shape (3, 3). */
export type LocalInformation = (
  friction: number,
  noise: number,
  errorVariance: number,
  interval: number,
  out: Float64Array,
) => void;

/**
 * @param flow  shape (n, d): mean velocity by place, see `measureFlow`; null at first order
 * @param stride  takes every so-many-th position of a track for the others, which is enough for a metric
 * @returns shape (p, p)
 */
export function expectInformation(
  tracks: TrackSet,
  layout: LikelihoodLayout,
  setting: PassSetting,
  local: LocalInformation,
  parameters: Float64Array,
  flow: Float64Array | null,
  stride = 1,
): Float64Array {
  const d = layout.dimensions;
  const p = layout.size;
  const out = new Float64Array(p * p);
  const model = withParameters(layout.model, parameters.subarray(0, layout.modelSize));
  const evaluator = createModelEvaluator(model);
  const frictions = new Float64Array(d * d);
  const noises = new Float64Array(d * d);
  const errors = new Float64Array(d);
  const information = new Float64Array(9);
  readErrorVariances(layout, setting, parameters, errors);
  const pointErrors =
    layout.errorOffset < 0 && setting.knownError === null ? tracks.localizationErrors : null;
  const indices = layout.bases.map((basis) => new Int32Array(basis.support));
  const values = layout.bases.map((basis) => new Float64Array(basis.support));
  const sums = new Float64Array(d * 5); // per axis: weights of force, ΓΓ, ΓN, NN, and force with Γ
  const { positions, times, trackOffsets } = tracks;
  for (let track = 0; track < countTracks(tracks); track++) {
    for (let row = trackOffsets[track] + 1 + (track % stride); row < trackOffsets[track + 1]; row += stride) {
      const at = row * d;
      const interval = times[row] - times[row - 1];
      layout.bases.forEach((basis, b) => {
        const count = basis.evaluateInto(positions, at, indices[b], values[b]);
        values[b].fill(0, count);
      });
      evaluator.frictionInto(positions, at, frictions);
      evaluator.noiseInto(positions, at, noises);
      for (let axis = 0; axis < d; axis++) {
        const noise = noises[axis * d + axis];
        const error = pointErrors ? pointErrors[at + axis] ** 2 : errors[axis];
        local(frictions[axis * d + axis], noise, error, interval, information);
        sums[axis] = model.order === 'second' ? interval / noise : interval / (2 * noise);
        const carried = flow ? -frictions[axis * d + axis] * flow[at + axis] : 0;
        sums[4 * d + axis] = sums[axis] * carried;
        sums[d + axis] = information[0] + sums[axis] * carried * carried;
        sums[2 * d + axis] = information[1];
        sums[3 * d + axis] = information[4];
        if (layout.errorOffset >= 0) {
          const e = layout.errorOffset + axis;
          out[e * p + e] += information[8];
          if (layout.friction && layout.friction.basis >= 0)
            addBorder(out, p, layout.friction, axis, d, e, information[2], indices, values);
          addBorder(out, p, layout.noise, axis, d, e, information[5], indices, values);
        }
      }
      addProducts(out, p, layout.force, layout.force, sums, 0, d, indices, values);
      addProducts(out, p, layout.noise, layout.noise, sums, 3 * d, d, indices, values);
      if (layout.friction) {
        addProducts(out, p, layout.friction, layout.friction, sums, d, d, indices, values);
        addProducts(out, p, layout.friction, layout.noise, sums, 2 * d, d, indices, values);
        if (flow) addProducts(out, p, layout.force, layout.friction, sums, 4 * d, d, indices, values);
      }
    }
  }
  for (let i = 0; i < p; i++) {
    out[i * p + i] *= stride;
    for (let j = 0; j < i; j++) out[i * p + j] = out[j * p + i] *= stride;
  }
  return out;
}

/** Adds the weights of every axis to the (upper) block between two fields. */
function addProducts(
  out: Float64Array,
  p: number,
  first: FieldSlot,
  second: FieldSlot,
  weights: Float64Array,
  from: number,
  d: number,
  indices: readonly Int32Array[],
  values: readonly Float64Array[],
): void {
  if (first.basis < 0 || second.basis < 0) return;
  const same = first === second;
  const perAxis = first.components === d || second.components === d;
  for (let axis = 0; axis < (perAxis ? d : 1); axis++) {
    let weight = weights[from + axis];
    if (!perAxis) for (let other = 1; other < d; other++) weight += weights[from + other];
    const rowOffset = first.offset + (first.components === d ? axis : 0) * first.functionCount;
    const columnOffset = second.offset + (second.components === d ? axis : 0) * second.functionCount;
    const fi = indices[first.basis];
    const fv = values[first.basis];
    const si = indices[second.basis];
    const sv = values[second.basis];
    for (let i = 0; i < fi.length; i++) {
      const scaled = weight * fv[i];
      const base = (rowOffset + fi[i]) * p + columnOffset;
      for (let j = 0; j < si.length; j++) {
        if (!same || si[j] >= fi[i]) out[base + si[j]] += scaled * sv[j];
      }
    }
  }
}

/** Adds the information between a field and the logarithm of an axis' error variance. */
function addBorder(
  out: Float64Array,
  p: number,
  slot: FieldSlot,
  axis: number,
  d: number,
  column: number,
  weight: number,
  indices: readonly Int32Array[],
  values: readonly Float64Array[],
): void {
  const offset = slot.offset + (slot.components === d ? axis : 0) * slot.functionCount;
  const own = indices[slot.basis];
  for (let i = 0; i < own.length; i++) out[(offset + own[i]) * p + column] += weight * values[slot.basis][i];
}

/** Tabulated over log ΓΔ and log s²/(TΔ²), read off bilinearly: a metric needs no more. */
const TABLE = { lowX: -7, highX: 3.5, lowR: -14, highR: 9, step: 0.5 };
const TABLE_ROWS = Math.round((TABLE.highX - TABLE.lowX) / TABLE.step) + 1;
const TABLE_COLUMNS = Math.round((TABLE.highR - TABLE.lowR) / TABLE.step) + 1;
const FREQUENCIES = 160;

/** The information of one position for a model of the given order; at second order it tabulates first. */
export function createLocalInformation(order: 'first' | 'second'): LocalInformation {
  if (order === 'first') return firstOrderInformation;
  const table = fillTable();
  return (friction, noise, errorVariance, interval, out) => {
    const x = Math.max(friction * interval, 1e-12);
    const thermal = (noise / (2 * Math.max(friction, 1e-300))) * interval * interval;
    readTable(table, Math.log(x), Math.log(Math.max(errorVariance / thermal, 1e-300)), out);
  };
}

function readTable(table: Float64Array, logX: number, logRatio: number, out: Float64Array): void {
  const u = Math.min(Math.max((logX - TABLE.lowX) / TABLE.step, 0), TABLE_ROWS - 1.001);
  const v = Math.min(Math.max((logRatio - TABLE.lowR) / TABLE.step, 0), TABLE_COLUMNS - 1.001);
  const i = Math.floor(u);
  const j = Math.floor(v);
  const s = u - i;
  const t = v - j;
  const here = (i * TABLE_COLUMNS + j) * 9;
  const below = here + TABLE_COLUMNS * 9;
  for (let entry = 0; entry < 9; entry++) {
    out[entry] =
      (1 - s) * ((1 - t) * table[here + entry] + t * table[here + 9 + entry]) +
      s * ((1 - t) * table[below + entry] + t * table[below + 9 + entry]);
  }
}

function fillTable(): Float64Array {
  const filled = new Float64Array(TABLE_ROWS * TABLE_COLUMNS * 9);
  for (let i = 0; i < TABLE_ROWS; i++) {
    for (let j = 0; j < TABLE_COLUMNS; j++) {
      const ratio = Math.exp(TABLE.lowR + j * TABLE.step);
      const x = Math.exp(TABLE.lowX + i * TABLE.step);
      const values = informationPerPosition(x, Math.sqrt(ratio), FREQUENCIES);
      const scale = [1, 1, ratio]; // from s² to log s²
      for (let a = 0; a < 3; a++) {
        for (let b = 0; b < 3; b++)
          filled[(i * TABLE_COLUMNS + j) * 9 + a * 3 + b] = values[a * 3 + b] * scale[a] * scale[b];
      }
    }
  }
  return filled;
}

/**
 * First order: the displacement spectrum is 2Dh + 2s²(1 − cos ω). With r = 2s²/(2Dh), the mean over ω of (1 + r(1 − cos ω))⁻²
 * is (1 + r)/(1 + 2r)^{3/2} and that of (1 + r(1 − cos ω))⁻¹ is (1 + 2r)^{−1/2}.
 */
function firstOrderInformation(
  _friction: number,
  noise: number,
  errorVariance: number,
  interval: number,
  out: Float64Array,
): void {
  const r = errorVariance / (noise * interval);
  const single = 1 / Math.sqrt(1 + 2 * r);
  const double = (1 + r) * single * single * single;
  out.fill(0);
  out[4] = double / 2;
  out[5] = (single - double) / 2;
  out[7] = out[5];
  out[8] = (1 - 2 * single + double) / 2;
}

/**
 * Carries the correction for the finite interval from places to coefficients: effective fields are evaluated at
 * places the tracks visited, corrected there, and the change is projected back on each field's own basis.
 */

import type { Basis } from '../../fields/Basis.js';
import type { CoefficientField, Model } from '../../fields/CoefficientField.js';
import { createBasis } from '../../fields/createBasis.js';
import { modelFields } from '../../fields/modelParameters.js';
import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../../numerics/linear/choleskyFactor.js';
import { trace } from '../../numerics/linear/denseMatrix.js';
import { countPositions, type TrackSet } from '../../tracks/TrackSet.js';
import { canonicalOrder } from '../blocks.js';
import type { EstimationPlan } from '../Estimate.js';
import { correctFirstOrderInto, correctSecondOrderInto, type LocalCoefficients } from './correctInterval.js';

export interface IntervalCorrection {
  /** Raw (effective) parameters in, model parameters out; the input is left untouched. */
  correct(raw: Float64Array): Float64Array;
}

/** Places at which the correction is worked out; it varies slowly, so a thousand are plenty. */
const NODES = 1000;

/** A field of the model with its basis values at the nodes and the projection back on it. */
interface NodeField {
  readonly basis: Basis;
  /** Position of the field's parameters in the raw vector, −1 where the field is zero. */
  readonly rawOffset: number;
  readonly modelOffset: number;
  readonly components: number;
  readonly design: NodeDesign;
  /** Lower-triangular factor of the normal equations of the projection back on the basis, shape (k, k). */
  readonly projection: Float64Array;
}

/** The functions that are not zero at the nodes; as many entries per node as the basis has at most. */
interface NodeDesign {
  readonly support: number;
  readonly indices: Int32Array;
  readonly values: Float64Array;
}

/**
 * Prepares the correction for one set of tracks and bases.
 *
 * @param model  template that fixes bases and forms
 * @param errorVariance  localization variance per axis, length²
 */
export function createIntervalCorrection(
  tracks: TrackSet,
  plan: EstimationPlan,
  model: Model,
  errorVariance: readonly number[],
): IntervalCorrection {
  const { dimensions: d, samplingInterval } = tracks;
  const fields = modelFields(model);
  const uniform = fields.every((field) => field.basis.kind === 'constant');
  const nodes = pickNodes(tracks, uniform ? 1 : NODES);
  const nodeCount = nodes.length / d;
  const plans = model.order === 'second' ? [plan.force, plan.friction, plan.noise] : [plan.force, plan.noise];
  let rawOffset = 0;
  let modelOffset = 0;
  const prepared = fields.map((field, index) => {
    const zero = plans[index].basis === null;
    const node = prepareField(field, nodes, d, zero ? -1 : rawOffset, modelOffset);
    const size = node.components * node.basis.functionCount;
    if (!zero) rawOffset += size;
    modelOffset += size;
    return node;
  });
  const [force, ...others] = prepared;
  const noise = others[others.length - 1];
  const friction = others.length === 2 ? others[0] : null;
  const slopesDesign = Array.from({ length: d }, (_, axis) => designAt(force.basis, nodes, d, axis));
  const noiseForm = fields[fields.length - 1].form;
  const frictionForm = friction ? fields[1].form : 'scalar';

  const correct = (raw: Float64Array): Float64Array => {
    const out = new Float64Array(modelOffset);
    for (const field of prepared) {
      if (field.rawOffset < 0) continue;
      const size = field.components * field.basis.functionCount;
      out.set(raw.subarray(field.rawOffset, field.rawOffset + size), field.modelOffset);
    }
    const forceValues = valuesAt(force, raw, force.design, nodeCount);
    const slopeValues = Array.from({ length: d }, (_, axis) =>
      componentAt(force, raw, slopesDesign[axis], nodeCount, axis),
    );
    const frictionValues = friction ? valuesAt(friction, raw, friction.design, nodeCount) : [];
    const noiseValues = valuesAt(noise, raw, noise.design, nodeCount);
    const local: LocalCoefficients = {
      force: new Float64Array(d),
      friction: new Float64Array(d * d),
      noise: new Float64Array(d * d),
    };
    const slopes = new Float64Array(d);
    for (let node = 0; node < nodeCount; node++) {
      for (let axis = 0; axis < d; axis++) {
        local.force[axis] = forceValues[axis][node];
        slopes[axis] = slopeValues[axis][node];
      }
      spreadComponents(local.friction, frictionValues, node, frictionForm, d, false);
      spreadComponents(local.noise, noiseValues, node, noiseForm, d, true);
      if (friction) correctSecondOrderInto(local, slopes, errorVariance, samplingInterval);
      else correctFirstOrderInto(local, slopes, errorVariance, samplingInterval);
      for (let axis = 0; axis < d; axis++)
        forceValues[axis][node] = local.force[axis] - forceValues[axis][node];
      gatherChange(frictionValues, local.friction, node, frictionForm, d, false);
      gatherChange(noiseValues, local.noise, node, noiseForm, d, true);
    }
    addProjected(out, force, forceValues, nodeCount);
    if (friction) addProjected(out, friction, frictionValues, nodeCount);
    addProjected(out, noise, noiseValues, nodeCount);
    return out;
  };
  return { correct };
}

/** Evenly spaced rows, track after track in canonical order: places weigh as often as they were visited. */
function pickNodes(tracks: TrackSet, most: number): Float64Array {
  const { dimensions: d, positions, trackOffsets } = tracks;
  const n = countPositions(tracks);
  const count = Math.min(n, most);
  const nodes = new Float64Array(count * d);
  let before = 0;
  let node = 0;
  for (const track of canonicalOrder(tracks)) {
    const rows = trackOffsets[track + 1] - trackOffsets[track];
    for (; node < count; node++) {
      const place = Math.floor(((node + 0.5) * n) / count) - before;
      if (place >= rows) break;
      const row = trackOffsets[track] + place;
      for (let axis = 0; axis < d; axis++) nodes[node * d + axis] = positions[row * d + axis];
    }
    before += rows;
  }
  return nodes;
}

function prepareField(
  field: CoefficientField,
  nodes: Float64Array,
  d: number,
  rawOffset: number,
  modelOffset: number,
): NodeField {
  const basis = createBasis(field.basis, d);
  const design = designAt(basis, nodes, d, null);
  const k = basis.functionCount;
  const normal = new Float64Array(k * k);
  for (let start = 0; start < design.indices.length; start += design.support) {
    for (let i = start; i < start + design.support; i++) {
      for (let j = start; j < start + design.support; j++) {
        normal[design.indices[i] * k + design.indices[j]] += design.values[i] * design.values[j];
      }
    }
  }
  const scale = trace(normal, k) / k;
  const roughness = basis.roughness();
  // A trace of smoothing carries the change on to functions that no node reaches.
  for (let i = 0; roughness && i < normal.length; i++) normal[i] += 1e-4 * scale * roughness[i];
  for (let i = 0; i < k; i++) normal[i * k + i] += 1e-9 * scale;
  const projection = new Float64Array(k * k);
  factorCholeskyInto(normal, k, projection);
  return {
    basis,
    rawOffset,
    modelOffset,
    components: field.coefficients.length,
    design,
    projection,
  };
}

/** Basis values (axis null) or their derivatives along an axis at the nodes. */
function designAt(basis: Basis, nodes: Float64Array, d: number, axis: number | null): NodeDesign {
  const nodeCount = nodes.length / d;
  const { support } = basis;
  const indices = new Int32Array(nodeCount * support);
  const values = new Float64Array(nodeCount * support);
  for (let node = 0; node < nodeCount; node++) {
    const rowIndices = indices.subarray(node * support, (node + 1) * support);
    const rowValues = values.subarray(node * support, (node + 1) * support);
    if (axis === null) basis.evaluateInto(nodes, node * d, rowIndices, rowValues);
    else basis.differentiateInto(nodes, node * d, axis, rowIndices, rowValues);
  }
  return { support, indices, values };
}

function componentAt(
  field: NodeField,
  raw: Float64Array,
  { support, indices, values }: NodeDesign,
  nodeCount: number,
  component: number,
): Float64Array {
  const out = new Float64Array(nodeCount);
  if (field.rawOffset < 0) return out;
  const offset = field.rawOffset + component * field.basis.functionCount;
  for (let node = 0; node < nodeCount; node++) {
    let sum = 0;
    for (let i = node * support; i < (node + 1) * support; i++) sum += values[i] * raw[offset + indices[i]];
    out[node] = sum;
  }
  return out;
}

function valuesAt(
  field: NodeField,
  raw: Float64Array,
  design: NodeDesign,
  nodeCount: number,
): Float64Array[] {
  return Array.from({ length: field.components }, (_, component) =>
    componentAt(field, raw, design, nodeCount, component),
  );
}

/** Components of one node into a full d × d matrix. */
export function spreadComponents(
  matrix: Float64Array,
  components: readonly Float64Array[],
  node: number,
  form: string,
  d: number,
  symmetric: boolean,
): void {
  matrix.fill(0);
  forEachEntry(form, d, symmetric, (component, i, j) => {
    matrix[i * d + j] = components[component]?.[node] ?? 0;
    if (symmetric) matrix[j * d + i] = matrix[i * d + j];
  });
}

/** Replaces each component's value by how much it changed; a scalar changes by the mean over the axes. */
export function gatherChange(
  components: readonly Float64Array[],
  matrix: Float64Array,
  node: number,
  form: string,
  d: number,
  symmetric: boolean,
): void {
  const sums = new Float64Array(components.length);
  const counts = new Float64Array(components.length);
  forEachEntry(form, d, symmetric, (component, i, j) => {
    if (component >= sums.length) return;
    sums[component] += matrix[i * d + j];
    counts[component]++;
  });
  for (let c = 0; c < components.length; c++) components[c][node] = sums[c] / counts[c] - components[c][node];
}

/** Visits the matrix entries a form fills, in component order. */
function forEachEntry(
  form: string,
  d: number,
  symmetric: boolean,
  visit: (component: number, i: number, j: number) => void,
): void {
  if (form === 'matrix') {
    let component = 0;
    for (let i = 0; i < d; i++) for (let j = symmetric ? i : 0; j < d; j++) visit(component++, i, j);
  } else {
    for (let axis = 0; axis < d; axis++) visit(form === 'axes' ? axis : 0, axis, axis);
  }
}

function addProjected(
  out: Float64Array,
  field: NodeField,
  changes: readonly Float64Array[],
  nodeCount: number,
): void {
  if (field.rawOffset < 0) return;
  const k = field.basis.functionCount;
  const { support, indices, values } = field.design;
  for (let component = 0; component < field.components; component++) {
    const projected = new Float64Array(k);
    for (let node = 0; node < nodeCount; node++) {
      const change = changes[component][node];
      for (let i = node * support; i < (node + 1) * support; i++) projected[indices[i]] += values[i] * change;
    }
    solveLowerInPlace(field.projection, k, projected);
    solveUpperInPlace(field.projection, k, projected);
    const offset = field.modelOffset + component * k;
    for (let i = 0; i < k; i++) out[offset + i] += projected[i];
  }
}

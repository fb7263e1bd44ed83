/**
 * Carries the correction for the finite interval from places to coefficients: effective fields are evaluated at
 * places the tracks visited, corrected there, and the change is projected back on each field's own basis.
 */

import { CholeskyDecomposition, Matrix } from 'ml-matrix';
import type { Basis } from '../../fields/Basis.js';
import type { CoefficientField, Model } from '../../fields/CoefficientField.js';
import { createBasis } from '../../fields/createBasis.js';
import { modelFields } from '../../fields/modelParameters.js';
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
  /** Shape (nodes, k). */
  readonly design: Float64Array;
  /** Shape (k, nodes). */
  readonly projection: Float64Array;
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
  const slopesDesign = Array.from({ length: d }, (_, axis) => designMatrix(force.basis, nodes, d, axis));
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
  const design = designMatrix(basis, nodes, d, null);
  const nodeCount = nodes.length / d;
  const k = basis.functionCount;
  const matrix = Matrix.from1DArray(nodeCount, k, design);
  const normal = matrix.transpose().mmul(matrix);
  const scale = normal.trace() / k;
  const roughness = basis.roughness();
  // A trace of smoothing carries the change on to functions that no node reaches.
  for (let i = 0; i < k; i++) {
    for (let j = 0; j < k; j++) {
      const smooth = roughness ? 1e-4 * scale * roughness[i * k + j] : 0;
      normal.set(i, j, normal.get(i, j) + smooth + (i === j ? 1e-9 * scale : 0));
    }
  }
  const projection = new CholeskyDecomposition(normal).solve(matrix.transpose());
  return {
    basis,
    rawOffset,
    modelOffset,
    components: field.coefficients.length,
    design,
    projection: Float64Array.from(projection.to1DArray()),
  };
}

/** Basis values (axis null) or their derivatives along an axis at the nodes, shape (nodes, k). */
function designMatrix(basis: Basis, nodes: Float64Array, d: number, axis: number | null): Float64Array {
  const nodeCount = nodes.length / d;
  const k = basis.functionCount;
  const design = new Float64Array(nodeCount * k);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  for (let node = 0; node < nodeCount; node++) {
    const count =
      axis === null
        ? basis.evaluateInto(nodes, node * d, indices, values)
        : basis.differentiateInto(nodes, node * d, axis, indices, values);
    for (let i = 0; i < count; i++) design[node * k + indices[i]] += values[i];
  }
  return design;
}

function componentAt(
  field: NodeField,
  raw: Float64Array,
  design: Float64Array,
  nodeCount: number,
  component: number,
): Float64Array {
  const out = new Float64Array(nodeCount);
  if (field.rawOffset < 0) return out;
  const k = field.basis.functionCount;
  const offset = field.rawOffset + component * k;
  for (let node = 0; node < nodeCount; node++) {
    let sum = 0;
    for (let i = 0; i < k; i++) sum += design[node * k + i] * raw[offset + i];
    out[node] = sum;
  }
  return out;
}

function valuesAt(
  field: NodeField,
  raw: Float64Array,
  design: Float64Array,
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
  for (let component = 0; component < field.components; component++) {
    const offset = field.modelOffset + component * k;
    for (let i = 0; i < k; i++) {
      let sum = 0;
      const row = i * nodeCount;
      for (let node = 0; node < nodeCount; node++)
        sum += field.projection[row + node] * changes[component][node];
      out[offset + i] += sum;
    }
  }
}

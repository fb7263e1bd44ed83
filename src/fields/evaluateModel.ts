/** A model's coefficients as functions of place, without allocation per call. */

import { createSymmetricExponential } from '../numerics/linear/symmetricExponential.js';
import type { CoefficientField, Model, ModelEvaluator } from './CoefficientField.js';
import { createBasis } from './createBasis.js';

/** Writes all components of a field (after its link) at a place. */
type ComponentWriter = (places: ArrayLike<number>, offset: number, out: Float64Array) => void;

/**
 * Prepares a model for evaluation. The evaluator keeps scratch space of its own: use one per thread of control.
 *
 * @throws UsageError  where a basis does not fit the dimensions
 */
export function createModelEvaluator(model: Model): ModelEvaluator {
  const d = model.dimensions;
  if (model.order === 'first') {
    const drift = createComponentWriter(model.drift, d);
    const diffusion = createMatrixWriter(model.diffusion, d);
    return {
      model,
      forceInto: drift,
      frictionInto: (_places, _offset, out) => void out.fill(0),
      noiseInto: diffusion,
    };
  }
  return {
    model,
    forceInto: createComponentWriter(model.force, d),
    frictionInto: createMatrixWriter(model.friction, d),
    noiseInto: createMatrixWriter(model.noise, d),
  };
}

/** Weighted sums of the basis, component by component, through `log` where the link says so. */
function createComponentWriter(field: CoefficientField, d: number): ComponentWriter {
  const basis = createBasis(field.basis, d);
  const k = basis.functionCount;
  const weights = Float64Array.from(field.coefficients.flat());
  const components = field.coefficients.length;
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const exponential = field.link === 'log';
  return (places, offset, out) => {
    const count = basis.evaluateInto(places, offset, indices, values);
    for (let component = 0; component < components; component++) {
      const base = component * k;
      let sum = 0;
      for (let i = 0; i < count; i++) sum += weights[base + indices[i]] * values[i];
      out[component] = exponential ? Math.exp(sum) : sum;
    }
  };
}

/** Spreads a field's components over a full d × d matrix. */
function createMatrixWriter(field: CoefficientField, d: number): ComponentWriter {
  const write = createComponentWriter(field, d);
  const components = new Float64Array(Math.max(field.coefficients.length, d * d));
  if (field.form !== 'matrix') {
    const scalar = field.form === 'scalar';
    return (places, offset, out) => {
      write(places, offset, components);
      out.fill(0);
      for (let axis = 0; axis < d; axis++) out[axis * d + axis] = components[scalar ? 0 : axis];
    };
  }
  const symmetric = field.name === 'noise' || field.name === 'diffusion';
  const values = new Float64Array(d);
  const vectors = new Float64Array(d * d);
  const half = new Float64Array(d * d);
  const exponential = new Float64Array(d * d);
  const { decompose } = createSymmetricExponential(d);
  return (places, offset, out) => {
    write(places, offset, components);
    let component = 0;
    for (let i = 0; i < d; i++) {
      for (let j = symmetric ? i : 0; j < d; j++) {
        out[i * d + j] = components[component++];
        if (symmetric) out[j * d + i] = out[i * d + j];
      }
    }
    if (field.link !== 'log-matrix') return;
    // exp of the symmetric part; an antisymmetric part (friction only) is added as it is
    for (let i = 0; i < d; i++) {
      for (let j = 0; j < d; j++) half[i * d + j] = (out[i * d + j] + out[j * d + i]) / 2;
    }
    for (let i = 0; i < d * d; i++) out[i] -= half[i];
    decompose(half, values, vectors, exponential);
    for (let i = 0; i < d * d; i++) out[i] += exponential[i];
  };
}

/** A model whose force has a potential: the gradient field closest to the fitted force over the visited places. */

import type { Model } from '../fields/CoefficientField.js';
import { createBasis } from '../fields/createBasis.js';
import { createModelEvaluator } from '../fields/evaluateModel.js';
import { imposeVector, solveRidged } from './imposeField.js';
import { createForceReader } from './readForce.js';

/**
 * Minimises the mean of |f + ∇U|² over the nodes, with the potential U on the basis of the force, and sets f = −∇U; at
 * first order f is the force over the thermal energy, and the drift becomes D f + ∇·D.
 *
 * @param nodes  shape (m, d)
 * @param steps  length d: for derivatives, length
 */
export function imposePotential(model: Model, nodes: Float64Array, steps: Float64Array): Model {
  const d = model.dimensions;
  const m = nodes.length / d;
  const field = model.order === 'second' ? model.force : model.drift;
  const basis = createBasis(field.basis, d);
  const k = basis.functionCount;
  const read = createForceReader(model, steps, true);
  const gradients = Array.from({ length: d }, () => new Float64Array(m * k));
  const indices = new Int32Array(basis.support);
  const slopes = new Float64Array(basis.support);
  const normal = new Float64Array(k * k);
  const right = new Float64Array(k);
  const force = new Float64Array(d);
  for (let node = 0; node < m; node++) {
    read(nodes, node * d, force);
    for (let axis = 0; axis < d; axis++) {
      const found = basis.differentiateInto(nodes, node * d, axis, indices, slopes);
      for (let i = 0; i < found; i++) {
        gradients[axis][node * k + indices[i]] += slopes[i];
        right[indices[i]] -= slopes[i] * force[axis];
        for (let j = 0; j < found; j++) normal[indices[i] * k + indices[j]] += slopes[i] * slopes[j];
      }
    }
  }
  const [potential] = solveRidged(normal, [right], k);
  const vectors = gradients.map((gradient) =>
    Float64Array.from({ length: m }, (_, node) => {
      let sum = 0;
      for (let i = 0; i < k; i++) sum -= gradient[node * k + i] * potential[i];
      return sum;
    }),
  );
  return imposeVector(
    model,
    model.order === 'second' ? vectors : toDrift(model, vectors, nodes, steps),
    nodes,
  );
}

/** D f + ∇·D at the nodes. */
function toDrift(
  model: Model,
  forces: readonly Float64Array[],
  nodes: Float64Array,
  steps: Float64Array,
): Float64Array[] {
  const d = model.dimensions;
  const evaluator = createModelEvaluator(model);
  const readIsothermal = createForceReader(model, steps, false);
  const drift = new Float64Array(d);
  const isothermal = new Float64Array(d);
  const diffusion = new Float64Array(d * d);
  const out = forces.map((values) => new Float64Array(values.length));
  for (let node = 0; node < out[0].length; node++) {
    evaluator.forceInto(nodes, node * d, drift);
    readIsothermal(nodes, node * d, isothermal);
    evaluator.noiseInto(nodes, node * d, diffusion);
    for (let i = 0; i < d; i++) {
      out[i][node] = drift[i] - isothermal[i];
      for (let j = 0; j < d; j++) out[i][node] += diffusion[i * d + j] * forces[j][node];
    }
  }
  return out;
}

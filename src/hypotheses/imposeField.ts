/** Models under a statement: a coefficient made to follow given values at places, on its own basis and link. */

import type { BasisSpec } from '../fields/Basis.js';
import type { CoefficientField, Model } from '../fields/CoefficientField.js';
import { createBasis } from '../fields/createBasis.js';
import {
  factorCholeskyInto,
  solveLowerInPlace,
  solveUpperInPlace,
} from '../numerics/linear/choleskyFactor.js';

const RIDGE = 1e-9; // relative: functions no node reaches stay at zero
const FLOOR = 1e-3; // of the mean: what a positive coefficient is raised to where a statement would have it lower

/**
 * Coefficients in a basis that come closest to functions at nodes (least squares).
 *
 * @param nodes  shape (m, d)
 * @param functions  arrays of length m
 * @returns one array of k coefficients per function
 */
export function projectOnBasis(
  spec: BasisSpec,
  nodes: Float64Array,
  functions: readonly Float64Array[],
  d: number,
): Float64Array[] {
  const basis = createBasis(spec, d);
  const k = basis.functionCount;
  const m = nodes.length / d;
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  const normal = new Float64Array(k * k);
  const rights = functions.map(() => new Float64Array(k));
  for (let node = 0; node < m; node++) {
    const found = basis.evaluateInto(nodes, node * d, indices, values);
    for (let i = 0; i < found; i++) {
      for (let j = 0; j < found; j++) normal[indices[i] * k + indices[j]] += values[i] * values[j];
      for (let f = 0; f < functions.length; f++) rights[f][indices[i]] += values[i] * functions[f][node];
    }
  }
  return solveRidged(normal, rights, k);
}

/** Solves (N + ridge) x = r for every right-hand side, in place; zero where N holds nothing. */
export function solveRidged(normal: Float64Array, rights: Float64Array[], k: number): Float64Array[] {
  let trace = 0;
  for (let i = 0; i < k; i++) trace += normal[i * k + i];
  for (let i = 0; i < k; i++) normal[i * k + i] += (RIDGE * trace) / k;
  const lower = new Float64Array(k * k);
  if (!factorCholeskyInto(normal, k, lower)) return rights.map((right) => right.fill(0));
  for (const right of rights) {
    solveLowerInPlace(lower, k, right);
    solveUpperInPlace(lower, k, right);
  }
  return rights;
}

/** The model with its force (drift) following `vectors`, d arrays of length m. */
export function imposeVector(model: Model, vectors: readonly Float64Array[], nodes: Float64Array): Model {
  const field = model.order === 'second' ? model.force : model.drift;
  const coefficients = projectOnBasis(field.basis, nodes, vectors, model.dimensions).map((row) =>
    Array.from(row),
  );
  const imposed = { ...field, coefficients };
  return model.order === 'second' ? { ...model, force: imposed } : { ...model, drift: imposed };
}

/**
 * The model with its friction or noise (diffusion) following matrices at the nodes.
 *
 * @param entry  the wanted entry (i, j) at a node; scalars take the mean of the diagonal
 */
export function imposeMatrix(
  model: Model,
  coefficient: 'friction' | 'noise' | 'diffusion',
  entry: (node: number, i: number, j: number) => number,
  nodes: Float64Array,
): Model {
  const d = model.dimensions;
  const m = nodes.length / d;
  const field =
    model.order === 'first' ? model.diffusion : coefficient === 'friction' ? model.friction : model.noise;
  const functions = listEntries(field, d).map((pairs) =>
    Float64Array.from({ length: m }, (_, node) => {
      let sum = 0;
      for (const [i, j] of pairs) sum += entry(node, i, j) / pairs.length;
      return sum;
    }),
  );
  const linked = field.link === 'log' ? functions.map(logarithms) : functions;
  const coefficients = projectOnBasis(field.basis, nodes, linked, d).map((row) => Array.from(row));
  const imposed = { ...field, coefficients };
  if (model.order === 'first') return { ...model, diffusion: imposed };
  return coefficient === 'friction' ? { ...model, friction: imposed } : { ...model, noise: imposed };
}

/** Matrix entries each component stands for, in component order. */
function listEntries({ form, name }: CoefficientField, d: number): [number, number][][] {
  const axes = Array.from({ length: d }, (_, axis) => axis);
  if (form === 'matrix')
    return axes.flatMap((i) =>
      axes.slice(name === 'friction' ? 0 : i).map((j): [number, number][] => [[i, j]]),
    );
  if (form === 'axes') return axes.map((axis) => [[axis, axis]]);
  return [axes.map((axis): [number, number] => [axis, axis])];
}

function logarithms(values: Float64Array): Float64Array {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += Math.max(0, values[i]);
  const floor = (FLOOR * sum) / values.length;
  return values.map((value) => Math.log(Math.max(value, floor)));
}

/**
 * Smooth functions of place in the order of their smoothness over the visited region: the directions along which a
 * coefficient is compared with a statement about it.
 *
 * The modes φ_i minimise ∫ ρ^(1 − 2/d) |∇φ|² dq under mean squared value 1, one after another, each orthogonal to the
 * ones before; means are over where the tracks have been, lengths along each axis in widths of the visited box, and ρ is
 * the density of positions. The first is 1. Gradients thus count by the typical distance between positions, ρ^(−1/d): in one dimension the modes are the cosines of the share
 * of positions to the left, bounded however rarely the edges are visited, so that no mode hangs on a few stray points.
 *
 * Symbols: `m` nodes, `d` dimensions, `k` basis functions, `I` modes.
 *
 * Source  functions in the order of their smoothness: Demmler & Reinsch, Oscillation matrices with spline smoothing,
 *         Numer. Math. 24 (1975) 375; cosines of ranks in tests: Durbin & Knott, Components of Cramér–von Mises
 *         statistics, J. R. Stat. Soc. B 34 (1972) 290.
 */

import { CholeskyDecomposition, EigenvalueDecomposition, Matrix } from 'ml-matrix';
import type { Basis, BasisSpec } from '../fields/Basis.js';
import { createBasis } from '../fields/createBasis.js';
import type { VisitedRegion } from '../tracks/visitedRegion.js';

export interface OccupancyModes {
  readonly count: number;
  /** Shape (I, m): each mode at the nodes; Σ_nodes φ_i φ_j / m = 1 where i = j, else 0. */
  readonly atNodes: readonly Float64Array[];
  /** Every mode at other places, shape (m′, d): I arrays of length m′. */
  evaluate(places: Float64Array): Float64Array[];
}

/** Smallest density taken for a cell of the visited box, relative to the mean over occupied cells. */
const FLOOR = 0.1;

const POINTS_PER_CELL = [4, 1, 1] as const; // along an axis, by dimensions
const RIDGE = 1e-9; // of the mean Gram entry: functions that no node reaches come last

/**
 * Modes over a basis.
 *
 * @param spec  basis the modes are combinations of
 * @param nodes  shape (m, d): places that stand for the occupancy
 * @param most  how many modes at most; the first is constant
 */
export function findOccupancyModes(
  spec: BasisSpec,
  nodes: Float64Array,
  visited: VisitedRegion,
  most: number,
): OccupancyModes {
  const d = visited.cells.length;
  const basis = createBasis(spec, d);
  const k = basis.functionCount;
  const design = evaluateDesign(basis, nodes, null);
  const gram = averageProducts(design, design, k);
  const { points, roots } = weighBox(visited);
  const gradient = Matrix.zeros(k, k);
  for (let axis = 0; axis < d; axis++) {
    const slopes = evaluateDesign(basis, points, axis);
    // In widths of the region: across a narrow one coefficients bend as well as along it.
    const width = visited.high[axis] - visited.low[axis];
    for (let i = 0; i < slopes.length; i++) slopes[i] *= width * roots[Math.floor(i / k)];
    gradient.add(averageProducts(slopes, slopes, k));
  }
  const ridge = (RIDGE * gram.trace()) / k;
  for (let i = 0; i < k; i++) gram.set(i, i, gram.get(i, i) + ridge);
  // φ = Lᵀ⁻¹ u turns the generalised problem into a symmetric one.
  const lower = new CholeskyDecomposition(gram).lowerTriangularMatrix;
  const half = solveLower(lower, gradient);
  const symmetric = solveLower(lower, half.transpose());
  const { realEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(symmetric, {
    assumeSymmetric: true,
  });
  const order = realEigenvalues.map((_, i) => i).sort((a, b) => realEigenvalues[a] - realEigenvalues[b]);
  const count = Math.min(most, k);
  // The first is the constant itself, exactly.
  const weights = order
    .slice(1, count)
    .map((column) => fixSign(solveUpper(lower, eigenvectorMatrix.getColumn(column))));
  const evaluateWith = (values: Float64Array, rows: number): Float64Array[] => [
    new Float64Array(rows).fill(1),
    ...weights.map((weight) => {
      const out = new Float64Array(rows);
      for (let row = 0; row < rows; row++) {
        for (let i = 0; i < k; i++) out[row] += values[row * k + i] * weight[i];
      }
      return out;
    }),
  ];
  return {
    count,
    atNodes: evaluateWith(design, nodes.length / d),
    evaluate: (places) => evaluateWith(evaluateDesign(basis, places, null), places.length / d),
  };
}

/** Basis values, or their derivatives along an axis, shape (rows, k). */
function evaluateDesign(basis: Basis, places: Float64Array, axis: number | null): Float64Array {
  const { dimensions: d, functionCount: k } = basis;
  const rows = places.length / d;
  const out = new Float64Array(rows * k);
  const indices = new Int32Array(basis.support);
  const values = new Float64Array(basis.support);
  for (let row = 0; row < rows; row++) {
    const found =
      axis === null
        ? basis.evaluateInto(places, row * d, indices, values)
        : basis.differentiateInto(places, row * d, axis, indices, values);
    for (let i = 0; i < found; i++) out[row * k + indices[i]] += values[i];
  }
  return out;
}

function averageProducts(left: Float64Array, right: Float64Array, k: number): Matrix {
  const rows = left.length / k;
  const sums = new Float64Array(k * k);
  for (let row = 0; row < rows; row++) {
    for (let i = 0; i < k; i++) {
      const value = left[row * k + i];
      if (value === 0) continue;
      for (let j = 0; j < k; j++) sums[i * k + j] += value * right[row * k + j];
    }
  }
  return Matrix.from1DArray(k, k, sums).mul(1 / rows);
}

/** A regular grid over the visited box, shape (points, d), with the root of ρ^(1 − 2/d) at each point. */
function weighBox(visited: VisitedRegion): { points: Float64Array; roots: Float64Array } {
  const { cells, counts, low, high } = visited;
  const d = cells.length;
  const perCell = POINTS_PER_CELL[d - 1];
  const size = cells.map((count) => count * perCell);
  const total = size.reduce((product, count) => product * count, 1);
  const points = new Float64Array(total * d);
  const roots = new Float64Array(total);
  const occupied = counts.filter((count) => count > 0);
  const mean = occupied.reduce((sum, count) => sum + count, 0) / Math.max(1, occupied.length);
  for (let point = 0; point < total; point++) {
    let rest = point;
    let cell = 0;
    let stride = 1;
    for (let axis = d - 1; axis >= 0; axis--) {
      const index = rest % size[axis];
      rest = Math.floor(rest / size[axis]);
      cell += Math.floor(index / perCell) * stride;
      stride *= cells[axis];
      points[point * d + axis] = low[axis] + ((index + 0.5) / size[axis]) * (high[axis] - low[axis]);
    }
    roots[point] = Math.max(FLOOR, counts[cell] / mean) ** (0.5 - 1 / d);
  }
  return { points, roots };
}

/** The largest weight is made positive, so that a mode does not depend on the whims of the eigensolver. */
function fixSign(weights: Float64Array): Float64Array {
  let largest = 0;
  for (let i = 1; i < weights.length; i++) if (Math.abs(weights[i]) > Math.abs(weights[largest])) largest = i;
  return weights[largest] < 0 ? weights.map((value) => -value) : weights;
}

/** X with L X = R. */
function solveLower(lower: Matrix, right: Matrix): Matrix {
  const out = right.clone();
  for (let i = 0; i < lower.rows; i++) {
    for (let c = 0; c < out.columns; c++) {
      let value = out.get(i, c);
      for (let j = 0; j < i; j++) value -= lower.get(i, j) * out.get(j, c);
      out.set(i, c, value / lower.get(i, i));
    }
  }
  return out;
}

/** x with Lᵀ x = r. */
function solveUpper(lower: Matrix, right: readonly number[]): Float64Array {
  const out = Float64Array.from(right);
  for (let i = out.length - 1; i >= 0; i--) {
    for (let j = i + 1; j < out.length; j++) out[i] -= lower.get(j, i) * out[j];
    out[i] /= lower.get(i, i);
  }
  return out;
}

/**
 * Tensor product of uniform B-splines, of degree 3 unless the spec names another. Along an open axis n functions of
 * degree 3 stand on n − 3 cells of the box (fewer than 4 functions: one cell of lower degree), of degree 1 on n − 1
 * cells: one on each knot. Along a periodic axis n functions stand on n cells and wrap.
 * The functions sum to one everywhere. Outside the box of an open axis the place is moved to its edge, so fields are
 * held there and their derivatives vanish.
 *
 * Source  values on a uniform cell: de Boor, A Practical Guide to Splines (1978), ch. X; penalty: Eilers & Marx,
 *         Statist. Sci. 11 (1996) 89 (second differences of neighbouring coefficients).
 */

import type { Basis, BasisSpec } from '../Basis.js';

type SplineSpec = Extract<BasisSpec, { kind: 'spline' }>;

/** The degree of a spline whose spec names none, and the highest. */
export const SPLINE_DEGREE = 3;

/** One axis: writes local function numbers and values (or derivatives) for a coordinate; returns how many. */
interface SplineAxis {
  readonly count: number;
  readonly support: number;
  readonly periodic: boolean;
  fill(coordinate: number, derivative: boolean, indices: Int32Array, values: Float64Array): number;
}

export function createSplineBasis(spec: SplineSpec, dimensions: number): Basis {
  const axes = Array.from({ length: dimensions }, (_, axis) =>
    createAxis(
      spec.counts[axis],
      spec.low[axis],
      spec.high[axis],
      spec.periods[axis],
      spec.degree ?? SPLINE_DEGREE,
    ),
  );
  const functionCount = axes.reduce((product, axis) => product * axis.count, 1);
  const support = axes.reduce((product, axis) => product * axis.support, 1);
  const localIndices = axes.map((axis) => new Int32Array(axis.support));
  const localValues = axes.map((axis) => new Float64Array(axis.support));

  const combine = (
    places: ArrayLike<number>,
    offset: number,
    along: number,
    indices: Int32Array,
    values: Float64Array,
  ): number => {
    let written = axes[0].fill(places[offset], along === 0, indices, values);
    for (let axis = 1; axis < dimensions; axis++) {
      const own = localIndices[axis];
      const ownValues = localValues[axis];
      const count = axes[axis].fill(places[offset + axis], along === axis, own, ownValues);
      // Expand in place from the back: entry (i, j) goes to i · count + j.
      for (let i = written - 1; i >= 0; i--) {
        const base = indices[i] * axes[axis].count;
        const value = values[i];
        for (let j = count - 1; j >= 0; j--) {
          indices[i * count + j] = base + own[j];
          values[i * count + j] = value * ownValues[j];
        }
      }
      written *= count;
    }
    return written;
  };

  return {
    spec,
    dimensions,
    functionCount,
    support,
    evaluateInto: (places, offset, indices, values) => combine(places, offset, -1, indices, values),
    differentiateInto: (places, offset, axis, indices, values) =>
      combine(places, offset, axis, indices, values),
    roughness: () => tensorRoughness(axes),
  };
}

function createAxis(count: number, low: number, high: number, period: number, highest: number): SplineAxis {
  const periodic = period > 0;
  const degree = periodic ? highest : Math.min(highest, count - 1);
  const cells = periodic ? count : count - degree;
  const perLength = cells / (periodic ? period : high - low);
  const weights = new Float64Array(highest + 1);
  const support = Math.min(count, degree + 1);

  return {
    count,
    support,
    periodic,
    fill(coordinate, derivative, indices, values) {
      let u = (coordinate - low) * perLength;
      let outside = false;
      if (periodic) {
        u -= Math.floor(u / cells) * cells;
      } else if (u < 0 || u > cells) {
        outside = true;
        u = u < 0 ? 0 : cells;
      }
      const cell = Math.min(Math.floor(u), cells - 1);
      const t = u - cell;
      if (derivative) fillSlopes(degree, t, outside ? 0 : perLength, weights);
      else fillWeights(degree, t, weights);
      if (support === degree + 1) {
        for (let i = 0; i <= degree; i++) {
          const index = cell + i;
          indices[i] = index < count ? index : index - count;
          values[i] = weights[i];
        }
        return support;
      }
      // A periodic axis with fewer functions than a cell carries: several land on the same one.
      for (let i = 0; i < support; i++) {
        indices[i] = i;
        values[i] = 0;
      }
      for (let i = 0; i <= degree; i++) values[(cell + i) % count] += weights[i];
      return support;
    },
  };
}

/** Writes the degree + 1 uniform B-splines that live on a cell, at t in [0, 1]. */
export function fillWeights(degree: number, t: number, weights: Float64Array): void {
  const r = 1 - t;
  if (degree === 3) {
    weights[0] = (r * r * r) / 6;
    weights[1] = (3 * t * t * t - 6 * t * t + 4) / 6;
    weights[2] = (3 * r * r * r - 6 * r * r + 4) / 6;
    weights[3] = (t * t * t) / 6;
  } else if (degree === 2) {
    weights[0] = (r * r) / 2;
    weights[1] = 0.5 + t * r;
    weights[2] = (t * t) / 2;
  } else if (degree === 1) {
    weights[0] = r;
    weights[1] = t;
  } else {
    weights[0] = 1;
  }
}

/** Their derivatives along the coordinate; `perLength` converts from t. */
function fillSlopes(degree: number, t: number, perLength: number, weights: Float64Array): void {
  const r = 1 - t;
  if (degree === 3) {
    weights[0] = (-r * r * perLength) / 2;
    weights[1] = (1.5 * t * t - 2 * t) * perLength;
    weights[2] = (2 * r - 1.5 * r * r) * perLength;
    weights[3] = (t * t * perLength) / 2;
  } else if (degree === 2) {
    weights[0] = -r * perLength;
    weights[1] = (r - t) * perLength;
    weights[2] = t * perLength;
  } else if (degree === 1) {
    weights[0] = -perLength;
    weights[1] = perLength;
  } else {
    weights[0] = 0;
  }
}

/** Sum over the axes of (second-difference penalty of that axis) ⊗ (identity of the others), scaled to trace k. */
function tensorRoughness(axes: readonly SplineAxis[]): Float64Array | null {
  const k = axes.reduce((product, axis) => product * axis.count, 1);
  const penalty = new Float64Array(k * k);
  let after = k;
  for (const axis of axes) {
    const n = axis.count;
    after /= n;
    const own = differencePenalty(n, axis.periodic);
    // Functions are numbered (before, own, after) with the first axis slowest.
    for (let before = 0; before < k / (n * after); before++) {
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < n; j++) {
          const value = own[i * n + j];
          if (value === 0) continue;
          for (let rest = 0; rest < after; rest++) {
            penalty[((before * n + i) * after + rest) * k + (before * n + j) * after + rest] += value;
          }
        }
      }
    }
  }
  let trace = 0;
  for (let i = 0; i < k; i++) trace += penalty[i * k + i];
  return trace > 0 ? penalty.map((value) => (value * k) / trace) : null;
}

function differencePenalty(n: number, periodic: boolean): Float64Array {
  const penalty = new Float64Array(n * n);
  if (n < 3) return penalty;
  for (let row = 0; row < (periodic ? n : n - 2); row++) {
    const members = [row, (row + 1) % n, (row + 2) % n];
    const signs = [1, -2, 1];
    for (let a = 0; a < 3; a++) {
      for (let b = 0; b < 3; b++) penalty[members[a] * n + members[b]] += signs[a] * signs[b];
    }
  }
  return penalty;
}

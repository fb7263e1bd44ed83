/**
 * Functions of position and velocity among which the slowest to relax is looked for: splines along open axes (a slow
 * passage between two regions is a step, which polynomials follow badly), waves along periodic ones, low powers of
 * velocities, and products of two coordinates.
 */

import { createBasis } from '../fields/createBasis.js';
import { quantileSorted } from '../numerics/statistics/quantile.js';

/** Functions of one coordinate: those that stand alone, and those that enter products, by degree. */
interface Univariate {
  readonly alone: readonly Float64Array[];
  readonly factors: readonly { readonly degree: number; readonly values: Float64Array }[];
}

const SPLINES = [14, 10, 7]; // along an open axis, by dimension
const WAVES = [4, 3, 2]; // along a periodic axis
const PRODUCT_DEGREE = 3; // total; with more than four coordinates 2
const EDGE_SHARE = 0.002; // of the samples beyond each end of the splines, which are held there

/**
 * Values of all functions at all samples, each with mean zero and variance one.
 *
 * @param samples  shape (n, c): the positions, then, at second order, the velocities
 * @param periods  length d; period of each axis, 0 where it does not wrap
 * @returns one array of length n per function
 */
export function evaluateSlowFunctions(
  samples: Float64Array,
  c: number,
  periods: readonly number[],
): Float64Array[] {
  const d = periods.length;
  const univariates = Array.from({ length: c }, (_, coordinate) => {
    const values = new Float64Array(samples.length / c);
    for (let row = 0; row < values.length; row++) values[row] = samples[row * c + coordinate];
    if (coordinate >= d) return describeVelocity(values);
    const period = periods[coordinate];
    return period > 0 ? describeWrapped(values, period, WAVES[d - 1]) : describeOpen(values, SPLINES[d - 1]);
  });
  const functions = univariates.flatMap(({ alone }) => [...alone]);
  const most = c > 4 ? 2 : PRODUCT_DEGREE;
  univariates.forEach(({ factors }, a) => {
    for (const other of univariates.slice(a + 1)) {
      for (const f of factors) {
        for (const g of other.factors) {
          if (f.degree + g.degree <= most)
            functions.push(f.values.map((value, row) => value * g.values[row]));
        }
      }
    }
  });
  for (const values of functions) standardize(values);
  return functions.filter((values) => Number.isFinite(values[0]));
}

function describeVelocity(values: Float64Array): Univariate {
  const z = standardize(Float64Array.from(values));
  const square = z.map((value) => value * value - 1);
  return {
    alone: [z, square],
    factors: [
      { degree: 1, values: z },
      { degree: 2, values: square },
    ],
  };
}

function describeOpen(values: Float64Array, count: number): Univariate {
  const sorted = Float64Array.from(values).sort();
  const low = quantileSorted(sorted, EDGE_SHARE);
  const high = quantileSorted(sorted, 1 - EDGE_SHARE);
  if (!(high > low)) return { alone: [], factors: [] };
  const basis = createBasis({ kind: 'spline', counts: [count], low: [low], high: [high], periods: [0] }, 1);
  const all = Array.from({ length: count }, () => new Float64Array(values.length));
  const indices = new Int32Array(basis.support);
  const parts = new Float64Array(basis.support);
  for (let row = 0; row < values.length; row++) {
    const found = basis.evaluateInto(values, row, indices, parts);
    for (let i = 0; i < found; i++) all[indices[i]][row] = parts[i];
  }
  const { factors } = describeVelocity(values.map((value) => Math.min(high, Math.max(low, value))));
  return { alone: all.slice(1), factors }; // the functions add to one, so the first says nothing new
}

function describeWrapped(values: Float64Array, period: number, waves: number): Univariate {
  const list = Array.from({ length: waves }, (_, index) => index + 1).flatMap((degree) =>
    [Math.cos, Math.sin].map((f) => ({
      degree,
      values: values.map((value) => f((2 * Math.PI * degree * value) / period)),
    })),
  );
  return { alone: list.map(({ values: own }) => own), factors: list };
}

/** Mean zero and variance one, in place. */
function standardize(values: Float64Array): Float64Array {
  let sum = 0;
  let square = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  const mean = sum / values.length;
  for (let i = 0; i < values.length; i++) square += (values[i] - mean) ** 2;
  const deviation = Math.sqrt(square / values.length);
  for (let i = 0; i < values.length; i++) values[i] = (values[i] - mean) / deviation;
  return values;
}

/**
 * Local polynomial regression in one dimension on data binned to equally spaced points, with a normal kernel: the
 * estimate, its derivatives, and the diagonals of its smoother matrix.
 *
 * Source  Wand & Jones, Kernel Smoothing (1995), ch. 5; binning: Fan & Marron, Fast implementations of nonparametric curve
 *         estimators, J. Comput. Graph. Stat. 3 (1994) 35.
 */

import { invertMatrix } from '../linear/smallMatrix.js';

/** Data dealt linearly to the two neighbouring points of a grid. */
export interface BinnedData {
  readonly low: number;
  readonly spacing: number;
  /** Length M: how many data each point stands for. */
  readonly counts: Float64Array;
  /** Length M: sum of their responses. */
  readonly sums: Float64Array;
}

/** Of a grid step: what rounding may put a datum at the upper end beyond it. */
const ROUNDING = 1e-9;

/** Beyond this many bandwidths the normal kernel is cut off; what is left out is below 1e-4 of the weight. */
export const KERNEL_REACH = 4;

/**
 * Deals data to a grid: each to its two neighbours, in proportion to nearness. Data outside are left out.
 *
 * @param size  number of points, from `low` to `high` included
 */
export function binLinearly(
  x: ArrayLike<number>,
  y: ArrayLike<number>,
  low: number,
  high: number,
  size: number,
): BinnedData {
  const spacing = (high - low) / (size - 1);
  const counts = new Float64Array(size);
  const sums = new Float64Array(size);
  for (let i = 0; i < x.length; i++) {
    const place = (x[i] - low) / spacing;
    if (!(place >= 0 && place <= size - 1 + ROUNDING)) continue;
    const left = Math.min(Math.floor(place), size - 2);
    const share = place - left;
    counts[left] += 1 - share;
    counts[left + 1] += share;
    sums[left] += (1 - share) * y[i];
    sums[left + 1] += share * y[i];
  }
  return { low, spacing, counts, sums };
}

/**
 * A derivative of the regression function at every grid point.
 *
 * @param degree  of the local polynomial
 * @param derivative  0 for the function itself; at most `degree`
 * @returns length M; NaN where the data within reach do not determine the polynomial
 */
export function fitLocalPolynomial(
  data: BinnedData,
  bandwidth: number,
  degree: number,
  derivative = 0,
): Float64Array {
  const factorial = [1, 1, 2, 6, 24][derivative] / bandwidth ** derivative;
  return mapLocally(data, bandwidth, degree, (inverse, _ownMoments, right, p) => {
    let value = 0;
    for (let j = 0; j < p; j++) value += inverse[derivative * p + j] * right[j];
    return factorial * value;
  });
}

/** Diagonals of the smoother matrix S (`own`) and of S Sᵀ (`squared`) per unit of count, length M each. */
export interface SmootherDiagonals {
  readonly own: Float64Array;
  readonly squared: Float64Array;
}

/** Diagonals of the matrix that takes responses to fitted values. */
export function smootherDiagonals(data: BinnedData, bandwidth: number, degree: number): SmootherDiagonals {
  const own = mapLocally(data, bandwidth, degree, (inverse) => inverse[0]);
  const squared = mapLocally(data, bandwidth, degree, (inverse, squares, _right, p) => {
    let value = 0;
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < p; j++) value += inverse[i] * squares[i * p + j] * inverse[j];
    }
    return value;
  });
  return { own, squared };
}

/**
 * At every grid point: builds Σ n K u^{i+j} (inverted), Σ n K² u^{i+j} and Σ K u^i Σy with u in bandwidths, and hands
 * them to `finish`.
 */
function mapLocally(
  data: BinnedData,
  bandwidth: number,
  degree: number,
  finish: (inverse: Float64Array, squares: Float64Array, right: Float64Array, p: number) => number,
): Float64Array {
  const { counts, sums, spacing } = data;
  const p = degree + 1;
  const reach = Math.floor((KERNEL_REACH * bandwidth) / spacing);
  const powers = new Float64Array(2 * degree + 1);
  const squarePowers = new Float64Array(2 * degree + 1);
  const right = new Float64Array(p);
  const matrix = new Float64Array(p * p);
  const squares = new Float64Array(p * p);
  return counts.map((_, centre) => {
    powers.fill(0);
    squarePowers.fill(0);
    right.fill(0);
    const last = Math.min(counts.length - 1, centre + reach);
    for (let i = Math.max(0, centre - reach); i <= last; i++) {
      if (counts[i] === 0) continue;
      const u = ((i - centre) * spacing) / bandwidth;
      const kernel = Math.exp((-u * u) / 2);
      let power = kernel;
      for (let j = 0; j <= 2 * degree; j++) {
        powers[j] += power * counts[i];
        squarePowers[j] += power * kernel * counts[i];
        if (j <= degree) right[j] += power * sums[i];
        power *= u;
      }
    }
    for (let i = 0; i < p; i++) {
      for (let j = 0; j < p; j++) {
        matrix[i * p + j] = powers[i + j];
        squares[i * p + j] = squarePowers[i + j];
      }
    }
    return finish(invertMatrix(matrix, p), squares, right, p);
  });
}

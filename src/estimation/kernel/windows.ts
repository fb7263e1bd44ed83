/**
 * How wide the kernel's window is at each knot: one bandwidth per axis for the whole field, wider where data are
 * scarce or scatter much, and a little narrower where they are plenty.
 */

import { type KernelGrid, separateKnots, stepsBetween } from './grid.js';

export interface KnotWindows {
  /** Knots with enough data around them to be estimated. */
  readonly visited: Int32Array;
  /** Length K: rows that each knot stands for, over their variance where that is smaller than usual. */
  readonly information: Float64Array;
  /** Length K: factor on the bandwidth, 1 at a place of typical density. */
  readonly factors: Float64Array;
  /** Per knot: the nearest visited ones (several where they are equally near); itself where visited. */
  readonly sources: readonly (readonly number[])[];
}

const SCARCE = 0.01; // of the mean count of occupied knots: below, a knot is continued from its neighbours
const WIDEST = 4;
const NARROWEST = 0.7;
/** Of the information a window usually holds: with less, instruments and velocities of a few tracks decide the estimate. */
const LEAST_SHARE = 0.3;
const WIDENING = 1.15;

/**
 * Windows for the density f of the data and the variance σ² of a row: the optimal bandwidth goes as (σ²/f)^{1/(4+d)}.
 *
 * @param counts  length K: how many rows each knot stands for
 * @param scales  length d: smoothing width of the density, length
 * @param variances  length K, relative; default: the same everywhere
 *
 * Source  the optimal local bandwidth of local linear regression: Fan & Gijbels (1996), eq. 3.20.
 */
export function createWindows(
  grid: KernelGrid,
  counts: Float64Array,
  scales: readonly number[],
  variances?: Float64Array,
): KnotWindows {
  const { size, dimensions: d } = grid;
  const rows = counts.reduce((sum, count) => sum + count, 0);
  const occupied = counts.reduce((sum, count) => sum + (count > 0 ? 1 : 0), 0);
  const least = (SCARCE * rows) / Math.max(1, occupied);
  const visited = Int32Array.from(
    Array.from({ length: size }, (_, knot) => knot).filter((knot) => counts[knot] > least),
  );
  const overVariance = (value: number, knot: number): number => (variances ? value / variances[knot] : value);
  const density = smoothCounts(grid, counts, scales).map(overVariance);
  let logarithm = 0;
  for (let knot = 0; knot < size; knot++)
    if (counts[knot] > 0) logarithm += (counts[knot] / rows) * Math.log(density[knot]);
  const factors = density.map((value) =>
    Math.max(NARROWEST, Math.min(WIDEST, (Math.exp(logarithm) / value) ** (1 / (4 + d)))),
  );
  const isVisited = new Uint8Array(size);
  for (const knot of visited) isVisited[knot] = 1;
  const sources = Array.from({ length: size }, (_, knot) =>
    isVisited[knot] === 1 ? [knot] : findNearest(grid, knot, visited),
  );
  // Rows that scatter much have widened the factor already; few rows are enough where each is precise.
  const information = counts.map((value, knot) => Math.max(value, overVariance(value, knot)));
  return { information, visited, factors, sources };
}

/**
 * Standard deviations of the normal kernel per knot and axis, shape (K, d), for one bandwidth per axis. Windows that
 * would hold less than a share of the usual information are widened until they hold it, or reach their limit.
 */
export function spreadBandwidth(
  windows: KnotWindows,
  bandwidth: readonly number[],
  grid: KernelGrid,
): Float64Array {
  const { size, dimensions: d, periods } = grid;
  const { information, factors, visited } = windows;
  const widths = new Float64Array(size * d);
  const contents = new Float64Array(size);
  const widen = (knot: number, factor: number): void => {
    for (let axis = 0; axis < d; axis++) {
      const wide = factor * bandwidth[axis];
      // On a period the window must not close on itself: the line would meet its own other end.
      widths[knot * d + axis] = periods[axis] > 0 ? Math.min(wide, WIDEST_ON_PERIOD * periods[axis]) : wide;
    }
    contents[knot] = weighCounts(grid, information, knot, widths.subarray(knot * d, (knot + 1) * d));
  };
  let usual = 0;
  let all = 0;
  for (const knot of visited) {
    widen(knot, factors[knot]);
    usual += information[knot] * contents[knot];
    all += information[knot];
  }
  const least = LEAST_SHARE * (usual / all);
  for (const knot of visited) {
    for (let factor = factors[knot]; contents[knot] < least && factor < WIDEST; ) {
      factor = Math.min(WIDEST, factor * WIDENING);
      widen(knot, factor);
    }
  }
  return widths;
}

/** Of the period: the kernel is then down to 4 % at the far side. */
export const WIDEST_ON_PERIOD = 0.2;

function smoothCounts(grid: KernelGrid, counts: Float64Array, scales: readonly number[]): Float64Array {
  const ones = new Float64Array(grid.size).fill(1);
  const widths = Float64Array.from(scales, (scale, axis) => Math.max(scale, grid.spacing[axis]));
  return counts.map(
    (_, knot) =>
      weighCounts(grid, counts, knot, widths) / weighCounts(grid, ones, knot, widths) + Number.MIN_VALUE,
  );
}

/** Σ kernel · counts around a knot. */
function weighCounts(
  grid: KernelGrid,
  counts: Float64Array,
  knot: number,
  widths: ArrayLike<number>,
): number {
  const kernel = kernelAround(grid, knot, widths);
  let sum = 0;
  for (let other = 0; other < grid.size; other++) sum += kernel[other] * counts[other];
  return sum;
}

/**
 * The normal kernel around a knot, 1 at its middle.
 *
 * @param widths  standard deviation along each axis, length
 * @returns length K
 */
export function kernelAround(grid: KernelGrid, knot: number, widths: ArrayLike<number>): Float64Array {
  const { size, dimensions: d, places, spacing } = grid;
  const kernels = grid.counts.map((count, axis) =>
    Float64Array.from({ length: count }, (_, i) => {
      const u = (spacing[axis] * stepsBetween(grid, i, places[axis][knot], axis)) / widths[axis];
      return Math.exp((-u * u) / 2);
    }),
  );
  const out = new Float64Array(size).fill(1);
  for (let axis = 0; axis < d; axis++) {
    for (let other = 0; other < size; other++) out[other] *= kernels[axis][places[axis][other]];
  }
  return out;
}

/** The visited knots nearest in units of the grid's spacing; all of those at (nearly) the same distance. */
function findNearest(grid: KernelGrid, knot: number, visited: Int32Array): number[] {
  const { dimensions: d, spacing } = grid;
  const distances = Float64Array.from(visited, (other) => {
    let sum = 0;
    for (let axis = 0; axis < d; axis++) sum += (separateKnots(grid, other, knot, axis) / spacing[axis]) ** 2;
    return sum;
  });
  const least = distances.reduce((smallest, value) => Math.min(smallest, value), Infinity);
  return Array.from(visited).filter((_, i) => distances[i] <= least + 1e-6);
}

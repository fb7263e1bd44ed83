/**
 * How wide the kernel's window is at each knot: one bandwidth per axis for the whole field, wider where data are
 * scarce and a little narrower where they are plenty.
 */

import { type KernelGrid, separateKnots } from './grid.js';

export interface KnotWindows {
  /** Knots with enough data around them to be estimated. */
  readonly visited: Int32Array;
  /** Length K: factor on the bandwidth, 1 at a place of typical density. */
  readonly factors: Float64Array;
  /** Per knot: the nearest visited ones (several where they are equally near); itself where visited. */
  readonly sources: readonly (readonly number[])[];
}

const SCARCE = 0.01; // of the mean count of occupied knots: below, a knot is continued from its neighbours
const WIDEST = 4;
const NARROWEST = 0.7;

/**
 * Windows for the density of the data. The optimal bandwidth falls with the density f as f^{−1/(4+d)}.
 *
 * @param counts  length K: how many rows each knot stands for
 * @param scales  length d: smoothing width of the density, length
 *
 * Source  the optimal local bandwidth of local linear regression: Fan & Gijbels (1996), eq. 3.20.
 */
export function createWindows(
  grid: KernelGrid,
  counts: Float64Array,
  scales: readonly number[],
): KnotWindows {
  const { size, dimensions: d } = grid;
  const rows = counts.reduce((sum, count) => sum + count, 0);
  const occupied = counts.reduce((sum, count) => sum + (count > 0 ? 1 : 0), 0);
  const least = (SCARCE * rows) / Math.max(1, occupied);
  const visited = Int32Array.from(
    Array.from({ length: size }, (_, knot) => knot).filter((knot) => counts[knot] > least),
  );
  const density = smoothCounts(grid, counts, scales);
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
  return { visited, factors, sources };
}

/** Standard deviations of the normal kernel per knot and axis, shape (K, d), for one bandwidth per axis. */
export function spreadBandwidth(
  windows: KnotWindows,
  bandwidth: readonly number[],
  grid: KernelGrid,
): Float64Array {
  const { size, dimensions: d, periods } = grid;
  const widths = new Float64Array(size * d);
  for (let knot = 0; knot < size; knot++) {
    for (let axis = 0; axis < d; axis++) {
      const wide = windows.factors[knot] * bandwidth[axis];
      // On a period the window must not close on itself: the line would meet its own other end.
      widths[knot * d + axis] = periods[axis] > 0 ? Math.min(wide, WIDEST_ON_PERIOD * periods[axis]) : wide;
    }
  }
  return widths;
}

/** Of the period: the kernel is then down to 4 % at the far side. */
export const WIDEST_ON_PERIOD = 0.2;

function smoothCounts(grid: KernelGrid, counts: Float64Array, scales: readonly number[]): Float64Array {
  const { size, dimensions: d, spacing } = grid;
  return counts.map((_, knot) => {
    let sum = 0;
    let reached = 0;
    for (let other = 0; other < size; other++) {
      let exponent = 0;
      for (let axis = 0; axis < d; axis++) {
        const width = Math.max(scales[axis], spacing[axis]);
        exponent += (separateKnots(grid, other, knot, axis) / width) ** 2 / 2;
      }
      const kernel = Math.exp(-exponent);
      sum += kernel * counts[other];
      reached += kernel;
    }
    return sum / reached + Number.MIN_VALUE;
  });
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

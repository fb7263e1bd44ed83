/**
 * The grid of the kernel estimator: moments are binned to its knots, coefficients are estimated at its knots, and
 * linear interpolation between knots makes fields of them.
 */

import type { Basis, BasisSpec } from '../../fields/Basis.js';
import { createBasis } from '../../fields/createBasis.js';
import { countPositions, type TrackSet } from '../../tracks/TrackSet.js';
import type { VisitedRegion } from '../../tracks/visitedRegion.js';

export interface KernelGrid {
  /** Splines of degree 1: one function per knot, so that coefficients are values at the knots. */
  readonly spec: BasisSpec;
  readonly basis: Basis;
  readonly dimensions: number;
  /** Number of knots K. */
  readonly size: number;
  /** Shape (K, d), length. */
  readonly knots: Float64Array;
  /** Length d: knots along each axis. */
  readonly counts: readonly number[];
  /** Per axis, length K: number of each knot along that axis. */
  readonly places: readonly Int32Array[];
  /** Length d: distance of neighbouring knots. */
  readonly spacing: readonly number[];
  /** Length d: width of the box, or the period. */
  readonly widths: readonly number[];
  /** Length d: period of each axis, 0 where open. */
  readonly periods: readonly number[];
}

const CELLS = [64, 20, 7]; // by dimensions: fine enough for features a tenth of the region wide
const FEW_POSITIONS = 25; // per cell on average; with fewer the grid is made coarser
const FEWEST_CELLS = 5;

/** A grid over the box of the visited region; on a periodic axis over one period. */
export function createKernelGrid(tracks: TrackSet, visited: VisitedRegion): KernelGrid {
  const { dimensions: d, periods } = tracks;
  const affordable = Math.floor((countPositions(tracks) / FEW_POSITIONS) ** (1 / d));
  const cells = Math.max(FEWEST_CELLS, Math.min(CELLS[d - 1], affordable));
  const counts = periods.map((period) => (period > 0 ? cells : cells + 1));
  const low = periods.map((period, axis) => (period > 0 ? 0 : visited.low[axis]));
  const high = periods.map((period, axis) => (period > 0 ? period : visited.high[axis]));
  const spec: BasisSpec = { kind: 'spline', counts, low, high, periods: [...periods], degree: 1 };
  const size = counts.reduce((product, count) => product * count, 1);
  const widths = low.map((edge, axis) => high[axis] - edge);
  const spacing = widths.map((width) => width / cells);
  const knots = new Float64Array(size * d);
  const places = counts.map(() => new Int32Array(size));
  for (let knot = 0; knot < size; knot++) {
    let rest = knot;
    for (let axis = d - 1; axis >= 0; axis--) {
      const place = rest % counts[axis];
      places[axis][knot] = place;
      knots[knot * d + axis] = low[axis] + place * spacing[axis];
      rest = Math.floor(rest / counts[axis]);
    }
  }
  return {
    spec,
    basis: createBasis(spec, d),
    dimensions: d,
    size,
    knots,
    counts,
    places,
    spacing,
    widths,
    periods: [...periods],
  };
}

/** Coordinate of one knot minus that of another along an axis, by the shorter way round a period. */
export function separateKnots(grid: KernelGrid, to: number, from: number, axis: number): number {
  return grid.spacing[axis] * stepsBetween(grid, grid.places[axis][to], grid.places[axis][from], axis);
}

/** The same in units of the spacing, for numbers of knots along the axis. */
export function stepsBetween(grid: KernelGrid, to: number, from: number, axis: number): number {
  const steps = to - from;
  const count = grid.counts[axis];
  return grid.periods[axis] > 0 ? steps - count * Math.round(steps / count) : steps;
}

/** Whether a place lies in the box of the grid; every place along a periodic axis does. */
export function isInside(grid: KernelGrid, places: ArrayLike<number>, offset: number): boolean {
  const { knots, dimensions: d, size, periods } = grid;
  for (let axis = 0; axis < d; axis++) {
    if (periods[axis] > 0) continue;
    const place = places[offset + axis];
    if (!(place >= knots[axis] && place <= knots[(size - 1) * d + axis])) return false;
  }
  return true;
}

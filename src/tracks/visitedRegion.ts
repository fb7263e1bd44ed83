/**
 * The visited region: where the tracks have been often enough for anything to be said, as counts on a grid.
 */

import { selectInPlace } from '../numerics/statistics/quantile.js';
import { countPositions, type TrackSet } from './TrackSet.js';

export interface VisitedRegion {
  /** Length d; lower corner of the grid, length. On a periodic axis 0. */
  readonly low: number[];
  /** Length d; upper corner, length. On a periodic axis the period. */
  readonly high: number[];
  /** Length d; cells along each axis. */
  readonly cells: number[];
  /** Positions in each cell, first axis slowest. */
  readonly counts: number[];
  /** A cell with at least this many positions counts as visited. */
  readonly threshold: number;
}

const CELLS_PER_AXIS = [64, 24, 12] as const; // by dimensions: 64, 576 and 1728 cells, all small enough for a fit file
const FEW_POSITIONS = 20; // per cell on average; with fewer the grid is made coarser
const FENCE = 5; // interquartile ranges beyond the quartiles: further out is an outlier, not a place visited
const PADDING = 1e-9; // of the width, so that the largest position falls inside the last cell

/**
 * Counts positions on a grid over the box they occupy. Periodic axes are wrapped to one period, [0, period); open
 * axes span the positions within five interquartile ranges of the quartiles, so that a stray point does not blow up
 * the box. With few positions the grid is coarser, and at least 4 cells wide.
 *
 * @returns the region as it stands in fit files; the threshold is 5 % of the mean count of the occupied cells, at
 *   least 1
 */
export function describeVisited(tracks: TrackSet): VisitedRegion {
  const { dimensions, positions, periods } = tracks;
  const n = countPositions(tracks);
  const low: number[] = [];
  const high: number[] = [];
  const perAxis = countCellsPerAxis(n, dimensions);
  for (let axis = 0; axis < dimensions; axis++) {
    const box = periods[axis] > 0 ? { low: 0, high: periods[axis] } : findBox(positions, n, dimensions, axis);
    low.push(box.low);
    high.push(box.high);
  }
  const cells = new Array<number>(dimensions).fill(perAxis);
  const counts = new Array<number>(perAxis ** dimensions).fill(0);
  const region = { low, high, cells, counts, threshold: 1 };
  let inside = 0;
  for (let row = 0; row < n; row++) {
    const cell = findCell(region, periods, positions, row * dimensions);
    if (cell < 0) continue;
    counts[cell]++;
    inside++;
  }
  let occupied = 0;
  for (let cell = 0; cell < counts.length; cell++) if (counts[cell] > 0) occupied++;
  return { ...region, threshold: Math.max(1, Math.round((0.05 * inside) / Math.max(occupied, 1))) };
}

/**
 * Whether a place lies in a cell that counts as visited.
 *
 * @param periods  length d; period of each axis, 0 where open
 * @param place  the coordinates start at `offset`; periodic axes may run on beyond one period
 */
export function isVisited(
  visited: VisitedRegion,
  periods: readonly number[],
  place: ArrayLike<number>,
  offset = 0,
): boolean {
  const cell = findCell(visited, periods, place, offset);
  return cell >= 0 && visited.counts[cell] >= visited.threshold;
}

/** Share of the cells of the grid that count as visited, 0 to 1. */
export function measureVisitedShare(visited: VisitedRegion): number {
  let count = 0;
  for (let cell = 0; cell < visited.counts.length; cell++) {
    if (visited.counts[cell] >= visited.threshold) count++;
  }
  return visited.counts.length === 0 ? 0 : count / visited.counts.length;
}

/** Number of the cell that holds a place, −1 outside the grid. */
export function findCell(
  visited: Pick<VisitedRegion, 'low' | 'high' | 'cells'>,
  periods: readonly number[],
  place: ArrayLike<number>,
  offset = 0,
): number {
  let cell = 0;
  for (let axis = 0; axis < visited.cells.length; axis++) {
    const low = visited.low[axis];
    const width = visited.high[axis] - low;
    let along = (place[offset + axis] - low) / width;
    if (periods[axis] > 0) along -= Math.floor(along);
    const cells = visited.cells[axis];
    let index = Math.floor(along * cells);
    if (periods[axis] > 0) index = Math.min(index, cells - 1); // a tiny negative wraps to exactly one period
    if (!(index >= 0 && index < cells)) return -1;
    cell = cell * cells + index;
  }
  return cell;
}

function countCellsPerAxis(positions: number, dimensions: number): number {
  const affordable = Math.floor((positions / FEW_POSITIONS) ** (1 / dimensions));
  return Math.max(4, Math.min(CELLS_PER_AXIS[dimensions - 1], affordable));
}

/** Range of the positions along one open axis, without extreme outliers. */
function findBox(
  positions: Float64Array,
  n: number,
  dimensions: number,
  axis: number,
): { low: number; high: number } {
  if (n === 0) return { low: 0, high: 1 };
  const values = new Float64Array(n);
  for (let row = 0; row < n; row++) values[row] = positions[row * dimensions + axis];
  const upper = selectInPlace(values, Math.ceil(0.75 * (n - 1)));
  const lower = selectInPlace(values, Math.floor(0.25 * (n - 1)));
  const fence = upper > lower ? FENCE * (upper - lower) : Infinity;
  let low = Infinity;
  let high = -Infinity;
  for (let i = 0; i < n; i++) {
    if (values[i] >= lower - fence && values[i] < low) low = values[i];
    if (values[i] <= upper + fence && values[i] > high) high = values[i];
  }
  const width = high - low;
  if (width > 0) return { low, high: high + PADDING * width };
  const margin = Math.abs(low) > 0 ? 1e-6 * Math.abs(low) : 0.5; // all at one place
  return { low: low - margin, high: low + margin };
}

/**
 * Centres of the visited cells, in cell order.
 *
 * @returns shape (m, d), length
 */
export function visitedCentres(visited: VisitedRegion): Float64Array {
  const d = visited.cells.length;
  const centres: number[] = [];
  for (let cell = 0; cell < visited.counts.length; cell++) {
    if (visited.counts[cell] < visited.threshold) continue;
    const place = new Array<number>(d);
    let rest = cell;
    for (let axis = d - 1; axis >= 0; axis--) {
      const index = rest % visited.cells[axis];
      rest = (rest - index) / visited.cells[axis];
      place[axis] =
        visited.low[axis] + ((index + 0.5) * (visited.high[axis] - visited.low[axis])) / visited.cells[axis];
    }
    centres.push(...place);
  }
  return Float64Array.from(centres);
}

/** The visited region as the pictures need it: its grid, lines and planes through its middle. */

import type { FitDocument } from '../../documents/FitDocument.js';
import type { PlaneGrid } from '../charts/mapChart.js';

type VisitedRegion = FitDocument['visited'];

/** Numbers of a cell along each axis, from its place in `counts` (first axis slowest). */
export function locateCell(region: VisitedRegion, index: number): number[] {
  const numbers: number[] = [];
  let rest = index;
  for (let axis = region.cells.length - 1; axis >= 0; axis--) {
    const size = region.cells[axis] ?? 1;
    numbers[axis] = rest % size;
    rest = Math.floor(rest / size);
  }
  return numbers;
}

/** Middle of a cell along one axis, length. */
export function cellCentre(region: VisitedRegion, axis: number, number: number): number {
  const low = region.low[axis] ?? 0;
  return low + (((region.high[axis] ?? 1) - low) * (number + 0.5)) / (region.cells[axis] ?? 1);
}

/** Number of visited cells. */
export function countVisited(region: VisitedRegion): number {
  return region.counts.filter((count) => count >= region.threshold).length;
}

/**
 * The visited cell nearest to the mean recorded position: where sections cross. (The mean itself may be in a hole,
 * as on a ring.)
 */
export function findMiddle(region: VisitedRegion): number[] {
  const d = region.cells.length;
  const mean = new Array<number>(d).fill(0);
  let total = 0;
  region.counts.forEach((count, index) => {
    if (count === 0) return;
    total += count;
    locateCell(region, index).forEach((number, axis) => {
      mean[axis] = (mean[axis] ?? 0) + count * number;
    });
  });
  if (total === 0) return region.cells.map((size) => Math.floor(size / 2));
  let best: number[] | null = null;
  let least = Number.POSITIVE_INFINITY;
  region.counts.forEach((count, index) => {
    if (count < region.threshold) return;
    const numbers = locateCell(region, index);
    const distance = numbers.reduce(
      (sum, number, axis) => sum + (number - (mean[axis] ?? 0) / total) ** 2,
      0,
    );
    if (distance < least) [best, least] = [numbers, distance];
  });
  return best ?? mean.map((sum) => Math.round(sum / total));
}

/** `count` places along one axis through the middle of the visited region, shape (count, d). */
export function layLine(
  region: VisitedRegion,
  axis: number,
  count: number,
): { x: Float64Array; places: Float64Array } {
  const d = region.cells.length;
  const middle = findMiddle(region);
  const x = new Float64Array(count);
  const places = new Float64Array(count * d);
  const [low, high] = [region.low[axis] ?? 0, region.high[axis] ?? 1];
  for (let i = 0; i < count; i++) {
    // Places keep half a step from the edges, where the last cell ends.
    x[i] = low + ((high - low) * (i + 0.5)) / count;
    for (let b = 0; b < d; b++)
      places[i * d + b] = b === axis ? (x[i] ?? 0) : cellCentre(region, b, middle[b] ?? 0);
  }
  return { x, places };
}

export interface Plane {
  readonly grid: PlaneGrid;
  /** Middles of the cells, shape (cells, d). */
  readonly places: Float64Array;
  readonly counts: readonly number[];
}

/** The cells of the plane of two axes through the middle of the visited region; second axis fastest. */
export function layPlane(region: VisitedRegion, first: number, second: number): Plane {
  const d = region.cells.length;
  const middle = findMiddle(region);
  const cells = [region.cells[first] ?? 1, region.cells[second] ?? 1] as const;
  const places = new Float64Array(cells[0] * cells[1] * d);
  const counts: number[] = [];
  for (let i = 0; i < cells[0]; i++) {
    for (let j = 0; j < cells[1]; j++) {
      const numbers = [...middle];
      numbers[first] = i;
      numbers[second] = j;
      for (let axis = 0; axis < d; axis++) {
        places[counts.length * d + axis] = cellCentre(region, axis, numbers[axis] ?? 0);
      }
      const index = numbers.reduce((sum, number, axis) => sum * (region.cells[axis] ?? 1) + number, 0);
      counts.push(region.counts[index] ?? 0);
    }
  }
  const grid: PlaneGrid = {
    low: [region.low[first] ?? 0, region.low[second] ?? 0],
    high: [region.high[first] ?? 1, region.high[second] ?? 1],
    cells,
    visited: Uint8Array.from(counts, (count) => (count >= region.threshold ? 1 : 0)),
  };
  return { grid, places, counts };
}

/** Positions per cell of one axis, summed over the others. */
export function sumAlongAxis(region: VisitedRegion, axis: number): number[] {
  const sums = new Array<number>(region.cells[axis] ?? 1).fill(0);
  region.counts.forEach((count, index) => {
    const number = locateCell(region, index)[axis] ?? 0;
    sums[number] = (sums[number] ?? 0) + count;
  });
  return sums;
}

/** Summaries of a region need no more places than this. */
const SUMMARY_PLACES = 600;

/** Middles of visited cells, shape (cells, d); every second, third, … cell where there are more than 600. */
export function gatherVisitedPlaces(region: VisitedRegion): Float64Array {
  const stride = Math.ceil(countVisited(region) / SUMMARY_PLACES);
  const places: number[] = [];
  let number = 0;
  region.counts.forEach((count, index) => {
    if (count < region.threshold || number++ % stride !== 0) return;
    locateCell(region, index).forEach((cell, axis) => {
      places.push(cellCentre(region, axis, cell));
    });
  });
  return Float64Array.from(places);
}

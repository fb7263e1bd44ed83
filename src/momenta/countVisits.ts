/**
 * How often places were visited: a visit is one entry of one track into a cell of a coarse grid. Many positions of a
 * single slow passage say little about a place; several passages do.
 */

import { median } from '../numerics/statistics/quantile.js';
import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import { findCell, type VisitedRegion } from '../tracks/visitedRegion.js';

export interface VisitCount {
  /** Cells entered at least once. */
  readonly cells: number;
  /** Median number of entries of those cells. */
  readonly medianVisits: number;
  /** Share of the positions that lie in cells with fewer than five entries, 0 to 1. */
  readonly rareShare: number;
}

const COARSE_CELLS = [12, 8, 5] as const; // per axis, by dimensions: about as fine as a fitted field
const FEW_VISITS = 5;

/** Counts entries into the cells of a coarse grid over the visited box. */
export function countVisits(tracks: TrackSet, visited: VisitedRegion): VisitCount {
  const { dimensions, positions, periods, trackOffsets } = tracks;
  const perAxis = COARSE_CELLS[dimensions - 1];
  const grid = { low: visited.low, high: visited.high, cells: new Array<number>(dimensions).fill(perAxis) };
  const visits = new Int32Array(perAxis ** dimensions);
  const counts = new Int32Array(visits.length);
  for (let track = 0; track < countTracks(tracks); track++) {
    let before = -1;
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1]; row++) {
      const cell = findCell(grid, periods, positions, row * dimensions);
      if (cell >= 0) {
        counts[cell]++;
        if (cell !== before) visits[cell]++;
      }
      before = cell;
    }
  }
  let inside = 0;
  let rare = 0;
  for (let cell = 0; cell < counts.length; cell++) {
    inside += counts[cell];
    if (visits[cell] < FEW_VISITS) rare += counts[cell];
  }
  const entered = visits.filter((count) => count > 0);
  return {
    cells: entered.length,
    medianVisits: entered.length > 0 ? median(entered) : 0,
    rareShare: inside > 0 ? rare / inside : 0,
  };
}

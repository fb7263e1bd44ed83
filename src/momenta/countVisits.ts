/**
 * How often places were visited: a visit is one entry of one track into a cell of a coarse grid. Many positions of a
 * single slow passage say little about a place; several passages do.
 */

import { countTracks, type TrackSet } from '../tracks/TrackSet.js';
import { findCell, type VisitedRegion } from '../tracks/visitedRegion.js';

export interface VisitCount {
  /** Cells entered at least once. */
  readonly cells: number;
  /** Median number of entries of those cells. */
  readonly medianVisits: number;
  /** Share of those cells with fewer than five entries, 0 to 1. */
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
  for (let track = 0; track < countTracks(tracks); track++) {
    let before = -1;
    for (let row = trackOffsets[track]; row < trackOffsets[track + 1]; row++) {
      const cell = findCell(grid, periods, positions, row * dimensions);
      if (cell >= 0 && cell !== before) visits[cell]++;
      before = cell;
    }
  }
  const entered = visits.filter((count) => count > 0).sort();
  const rare = entered.filter((count) => count < FEW_VISITS).length;
  return {
    cells: entered.length,
    medianVisits: entered.length > 0 ? entered[entered.length >> 1] : 0,
    rareShare: entered.length > 0 ? rare / entered.length : 0,
  };
}

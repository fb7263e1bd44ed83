/**
 * Runs: stretches of a track without a gap, sampled at the usual interval. Finite differences are only ever taken
 * inside a run.
 */

import { countTracks, type TrackSet } from './TrackSet.js';

export interface Runs {
  /** First row of each run (included); length = number of runs. */
  readonly starts: Int32Array;
  /** Row after the last of each run (excluded). */
  readonly ends: Int32Array;
  /** Track each run belongs to. */
  readonly tracks: Int32Array;
}

/** Steps whose length differs from the usual interval by more than this fraction end a run. */
export const INTERVAL_TOLERANCE = 0.01; // differences err by the same fraction; camera jitter is well below it

/**
 * Splits every track where a step is not one sampling interval long (a gap, or an uneven interval).
 *
 * @returns runs of at least one position, in row order; together they hold every row once
 */
export function findRuns(tracks: TrackSet, tolerance = INTERVAL_TOLERANCE): Runs {
  const { times, trackOffsets, samplingInterval } = tracks;
  const starts: number[] = [];
  const ends: number[] = [];
  const owners: number[] = [];
  for (let track = 0; track < countTracks(tracks); track++) {
    const end = trackOffsets[track + 1];
    let start = trackOffsets[track];
    for (let row = start + 1; row <= end; row++) {
      const step = row < end ? times[row] - times[row - 1] : Infinity;
      if (Math.abs(step - samplingInterval) <= tolerance * samplingInterval) continue;
      starts.push(start);
      ends.push(row);
      owners.push(track);
      start = row;
    }
  }
  return { starts: Int32Array.from(starts), ends: Int32Array.from(ends), tracks: Int32Array.from(owners) };
}

/**
 * The same runs, those of low keys first and otherwise in the order in which they were.
 *
 * @param keyOfRow  length n, 0 or above; the key of a run is that of its first row
 */
export function orderRuns(runs: Runs, keyOfRow: Int32Array): Runs {
  const order = Int32Array.from(runs.starts.keys()).sort(
    (a, b) => keyOfRow[runs.starts[a]] - keyOfRow[runs.starts[b]] || a - b,
  );
  const pick = (values: Int32Array): Int32Array => order.map((run) => values[run]);
  return { starts: pick(runs.starts), ends: pick(runs.ends), tracks: pick(runs.tracks) };
}

/** Rows of the longest run. */
export function longestRun(runs: Runs): number {
  let longest = 0;
  for (let run = 0; run < runs.starts.length; run++)
    longest = Math.max(longest, runs.ends[run] - runs.starts[run]);
  return longest;
}

/**
 * The track store: every position of every track in flat typed arrays, sorted by time within a track.
 *
 * Shapes, used throughout the project: `m` tracks, `n` positions, `d` dimensions (1 to 3). Row-major. The rows of
 * track `i` are `trackOffsets[i]` (included) to `trackOffsets[i + 1]` (excluded). Gaps stay gaps: a missing frame is
 * simply a longer step in `times`.
 */

import type { Units } from '../units.js';

export interface TrackSet {
  readonly dimensions: number;
  /** Names of the coordinates as in the table's roles: the first `d` of x, y, z. */
  readonly coordinates: readonly string[];
  /** Length m; in order of first appearance in the files. */
  readonly trackNames: readonly string[];
  /** Length m + 1. */
  readonly trackOffsets: Int32Array;
  /** Length n; time, strictly increasing within a track. */
  readonly times: Float64Array;
  /** Shape (n, d); length. Periodic axes are unwrapped: values run on beyond one period. */
  readonly positions: Float64Array;
  /** Shape (n, d); standard deviation of the localization error per position, length; null where the table has none. */
  readonly localizationErrors: Float64Array | null;
  /** Length n; a local concentration per position, in a unit of the user's; absent where no column was named for it. */
  readonly concentrations?: Float64Array;
  /** Particle type per track, or null where the table has no such column. */
  readonly trackTypes: readonly string[] | null;
  /** The time between neighbouring frames (the usual one, where it varies). */
  readonly samplingInterval: number;
  /** Length d; period of each axis, 0 where it is open. */
  readonly periods: readonly number[];
  readonly units: Units;
}

export const COORDINATE_NAMES = ['x', 'y', 'z'] as const;

/** The number of tracks. */
export function countTracks(tracks: TrackSet): number {
  return tracks.trackOffsets.length - 1;
}

/** The number of positions. */
export function countPositions(tracks: TrackSet): number {
  return tracks.times.length;
}

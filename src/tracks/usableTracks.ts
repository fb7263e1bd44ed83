/** Tracks that can carry a fit, and parts of a track store. */

import { DataError, type Warning } from '../errors.js';
import { countTracks, type TrackSet } from './TrackSet.js';

/** Fewest positions of a track that say anything about the coefficients: one more than the differences taken. */
export const FEWEST_POSITIONS = { first: 3, second: 4 } as const;

export interface UsableTracks {
  /** The tracks with enough positions; the same object where all have. */
  readonly tracks: TrackSet;
  /** Tracks left out. */
  readonly tooShort: number;
  /** One warning where tracks were left out. */
  readonly warnings: readonly Warning[];
}

/**
 * Leaves out the tracks that are too short for a model of the given order.
 *
 * @throws DataError  no track has enough positions
 */
export function checkTrackLengths(tracks: TrackSet, order: 'first' | 'second'): UsableTracks {
  const fewest = FEWEST_POSITIONS[order];
  const count = countTracks(tracks);
  const usable: number[] = [];
  let longest = 0;
  for (let track = 0; track < count; track++) {
    const length = tracks.trackOffsets[track + 1] - tracks.trackOffsets[track];
    longest = Math.max(longest, length);
    if (length >= fewest) usable.push(track);
  }
  if (usable.length === count && count > 0) return { tracks, tooShort: 0, warnings: [] };
  if (usable.length === 0) {
    const positions = longest === 1 ? '1 position' : `${longest} positions`;
    throw new DataError(
      `the longest track has ${positions}; a ${order}-order model needs tracks of at least ${fewest}`,
      { order, longest, fewest, tracks: count },
    );
  }
  const tooShort = count - usable.length;
  const message =
    `${tooShort} of ${count} tracks ${tooShort === 1 ? 'has' : 'have'} fewer than ${fewest} positions ` +
    `and cannot be used at ${order} order`;
  return {
    tracks: selectTracks(tracks, usable),
    tooShort,
    warnings: [{ code: 'tracks-too-short', message }],
  };
}

/**
 * The track store of some tracks, in the order of the indices; an index may occur more than once.
 *
 * @param indices  each from 0 (included) to the number of tracks (excluded)
 * @throws RangeError  an index that is none
 */
export function selectTracks(tracks: TrackSet, indices: ArrayLike<number>): TrackSet {
  const { dimensions, trackOffsets } = tracks;
  const offsets = new Int32Array(indices.length + 1);
  for (let i = 0; i < indices.length; i++) {
    const track = indices[i];
    if (!Number.isInteger(track) || track < 0 || track >= countTracks(tracks)) {
      throw new RangeError(`there is no track ${track} among ${countTracks(tracks)}`);
    }
    offsets[i + 1] = offsets[i] + trackOffsets[track + 1] - trackOffsets[track];
  }
  const gather = (values: Float64Array, width: number): Float64Array => {
    const gathered = new Float64Array(offsets[indices.length] * width);
    for (let i = 0; i < indices.length; i++) {
      const track = indices[i];
      const part = values.subarray(trackOffsets[track] * width, trackOffsets[track + 1] * width);
      gathered.set(part, offsets[i] * width);
    }
    return gathered;
  };
  const pick = (values: readonly string[]): string[] => Array.from(indices, (track) => values[track]);
  const { localizationErrors: errors, trackTypes, concentrations } = tracks;
  return {
    ...tracks,
    trackNames: pick(tracks.trackNames),
    trackTypes: trackTypes === null ? null : pick(trackTypes),
    trackOffsets: offsets,
    times: gather(tracks.times, 1),
    positions: gather(tracks.positions, dimensions),
    localizationErrors: errors === null ? null : gather(errors, dimensions),
    ...(concentrations === undefined ? {} : { concentrations: gather(concentrations, 1) }),
  };
}

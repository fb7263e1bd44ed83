/** Small recordings written out by hand. */

import { COORDINATE_NAMES, type TrackSet } from '../../src/tracks/TrackSet.js';
import { NO_UNITS } from '../../src/units.js';

/**
 * @param tracks  per track: rows of time and coordinates
 * @param samplingInterval  default 1
 */
export function makeTracks(
  tracks: readonly (readonly (readonly number[])[])[],
  samplingInterval = 1,
): TrackSet {
  const dimensions = tracks[0][0].length - 1;
  const rows = tracks.flat();
  const trackOffsets = new Int32Array(tracks.length + 1);
  tracks.forEach((track, i) => {
    trackOffsets[i + 1] = trackOffsets[i] + track.length;
  });
  return {
    dimensions,
    coordinates: COORDINATE_NAMES.slice(0, dimensions),
    trackNames: tracks.map((_, i) => String(i + 1)),
    trackOffsets,
    times: Float64Array.from(rows, ([time]) => time),
    positions: Float64Array.from(rows.flatMap(([, ...place]) => place)),
    localizationErrors: null,
    trackTypes: null,
    samplingInterval,
    periods: new Array<number>(dimensions).fill(0),
    units: NO_UNITS,
  };
}

/** A track of one coordinate per frame, from frame 0 on; null for a missing frame. */
export function makeTrack(places: readonly (number | null)[], interval = 1): number[][] {
  return places.flatMap((place, frame) => (place === null ? [] : [[frame * interval, place]]));
}

/** The recording with every position moved. */
export function movePositions(
  tracks: TrackSet,
  move: (position: number, row: number, axis: number, track: number) => number,
): TrackSet {
  const { dimensions: d, trackOffsets } = tracks;
  let track = 0;
  const positions = tracks.positions.map((position, i) => {
    const row = Math.floor(i / d);
    while (row >= trackOffsets[track + 1]) track++;
    return move(position, row, i % d, track);
  });
  return { ...tracks, positions };
}

/** A few tracks, thinned, for pictures. */

import { countTracks, type TrackSet } from './TrackSet.js';

const MOST_TRACKS = 40; // more cannot be told apart in one picture
const MOST_POINTS = 150;

/**
 * Picks tracks evenly through the set and thins each.
 *
 * @returns name and points of each track; a point is time followed by the coordinates
 */
export function sampleTracks(tracks: TrackSet): { name: string; points: number[][] }[] {
  const count = countTracks(tracks);
  const chosen = Math.min(count, MOST_TRACKS);
  return Array.from({ length: chosen }, (_, index) => {
    const track = Math.floor((index * count) / chosen);
    const start = tracks.trackOffsets[track];
    const length = tracks.trackOffsets[track + 1] - start;
    const points = Math.min(length, MOST_POINTS);
    return {
      name: tracks.trackNames[track],
      points: Array.from({ length: points }, (_, point) => {
        const row = start + (points === 1 ? 0 : Math.floor((point * (length - 1)) / (points - 1)));
        const base = row * tracks.dimensions;
        return [tracks.times[row], ...tracks.positions.subarray(base, base + tracks.dimensions)].map(
          (value) => Number(value.toPrecision(7)),
        );
      }),
    };
  });
}

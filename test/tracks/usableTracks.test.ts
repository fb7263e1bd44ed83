import { describe, expect, it } from 'vitest';
import { DataError } from '../../src/errors.js';
import type { TrackSet } from '../../src/tracks/TrackSet.js';
import { checkTrackLengths, selectTracks } from '../../src/tracks/usableTracks.js';

/** Tracks named by their lengths; times and positions count up. */
function makeTracks(lengths: readonly number[]): TrackSet {
  const offsets = [0];
  for (const length of lengths) offsets.push(offsets[offsets.length - 1] + length);
  const count = offsets[offsets.length - 1];
  return {
    dimensions: 2,
    coordinates: ['x', 'y'],
    trackNames: lengths.map(String),
    trackOffsets: Int32Array.from(offsets),
    times: Float64Array.from({ length: count }, (_, i) => i),
    positions: Float64Array.from({ length: 2 * count }, (_, i) => i / 2),
    localizationErrors: Float64Array.from({ length: 2 * count }, (_, i) => -i),
    trackTypes: lengths.map((length) => `type ${length}`),
    samplingInterval: 1,
    periods: [0, 3],
    units: { length: 'm', time: null },
  };
}

describe('tracks long enough for a model', () => {
  it('need three positions at first order and four at second', () => {
    const tracks = makeTracks([1, 5, 3, 2, 4]);
    const first = checkTrackLengths(tracks, 'first');
    expect(first.tracks.trackNames).toEqual(['5', '3', '4']);
    expect(first.tooShort).toBe(2);
    const second = checkTrackLengths(tracks, 'second');
    expect(second.tracks.trackNames).toEqual(['5', '4']);
    expect(second.warnings).toEqual([
      {
        code: 'tracks-too-short',
        message: '3 of 5 tracks have fewer than 4 positions and cannot be used at second order',
      },
    ]);
  });

  it('are handed back as they are where all are long enough', () => {
    const tracks = makeTracks([4, 6]);
    expect(checkTrackLengths(tracks, 'second')).toEqual({ tracks, tooShort: 0, warnings: [] });
    expect(checkTrackLengths(tracks, 'second').tracks).toBe(tracks);
  });

  it('are a data error where there are none', () => {
    for (const [lengths, longest] of [
      [[3, 2], '3 positions'],
      [[1], '1 position'],
    ] as const) {
      let error: unknown;
      try {
        checkTrackLengths(makeTracks(lengths), 'second');
      } catch (thrown) {
        error = thrown;
      }
      expect(error).toBeInstanceOf(DataError);
      expect(error).toMatchObject({
        exitStatus: 3,
        message: `the longest track has ${longest}; a second-order model needs tracks of at least 4`,
      });
    }
  });
});

describe('selected tracks', () => {
  it('come in the order asked for, as often as asked for, with everything that belongs to them', () => {
    const selected = selectTracks(makeTracks([2, 1, 3]), [2, 1, 2]);
    expect(selected.trackNames).toEqual(['3', '1', '3']);
    expect(selected.trackTypes).toEqual(['type 3', 'type 1', 'type 3']);
    expect(Array.from(selected.trackOffsets)).toEqual([0, 3, 4, 7]);
    expect(Array.from(selected.times)).toEqual([3, 4, 5, 2, 3, 4, 5]);
    expect(Array.from(selected.positions.slice(0, 8))).toEqual([3, 3.5, 4, 4.5, 5, 5.5, 2, 2.5]);
    expect(Array.from(selected.localizationErrors?.slice(0, 2) ?? [])).toEqual([-6, -7]);
    expect(selected).toMatchObject({ periods: [0, 3], units: { length: 'm' }, samplingInterval: 1 });
  });

  it('of no index are none, and an index beyond the tracks is refused', () => {
    expect(Array.from(selectTracks(makeTracks([2]), []).trackOffsets)).toEqual([0]);
    for (const index of [1, -1, 0.5])
      expect(() => selectTracks(makeTracks([2]), [index])).toThrow(RangeError);
  });
});

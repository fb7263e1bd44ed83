import { describe, expect, it } from 'vitest';
import { countVisits } from '../../src/momenta/countVisits.js';
import { makeTrack, makeTracks } from '../support/makeTracks.js';

const grid = { low: [0], high: [12], cells: [4], counts: [0, 0, 0, 0], threshold: 1 }; // coarse cells of length 1

describe('visits', () => {
  it('are entries, not positions', () => {
    const stay = makeTrack([0.5, 0.5, 0.5, 1.5, 1.5, 0.5]); // enters the first cell twice, the second once
    expect(countVisits(makeTracks([stay]), grid)).toEqual({ cells: 2, medianVisits: 1.5, rareShare: 1 });
  });

  it('by several tracks count each, and rare places weigh by the positions in them', () => {
    const tracks = makeTracks([
      ...Array.from({ length: 5 }, () => makeTrack([0.5, 0.6, 0.4])),
      makeTrack([3.5, 3.5, 3.4, 3.5, 99]), // one lonely stay; the last position lies outside the grid
    ]);
    expect(countVisits(tracks, grid)).toEqual({ cells: 2, medianVisits: 3, rareShare: 4 / 19 });
  });

  it('wrap around a periodic axis', () => {
    const tracks = { ...makeTracks([makeTrack([0.5, 12.5, 24.5])]), periods: [12] };
    expect(countVisits(tracks, grid)).toMatchObject({ cells: 1, medianVisits: 1 });
  });
});

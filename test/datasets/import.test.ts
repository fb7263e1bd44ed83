/** Each data set is read with the options its description gives, whatever its dialect. */

import { createReadStream, readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { DATA_SETS } from '../../datasets/generate.js';
import { studySchema } from '../../src/documents/Study.js';
import { importTracks } from '../../src/import/importTracks.js';
import { countPositions, countTracks } from '../../src/tracks/TrackSet.js';

test.each(DATA_SETS)('$name is read without a warning, whole, in its units', async (set) => {
  const place = new URL(`../../datasets/${set.name}/`, import.meta.url);
  const descriptor = JSON.parse(readFileSync(new URL('datapackage.json', place), 'utf8')) as {
    wanderlaw: { study: unknown };
    resources: { rows: number }[];
  };
  const study = studySchema.parse(descriptor.wanderlaw.study);
  const chunks = createReadStream(new URL('tracks.csv', place));
  const { tracks, warnings } = await importTracks([{ name: 'tracks.csv', chunks }], study);
  expect(warnings).toEqual([]);
  expect(countTracks(tracks)).toBe(set.trackCount);
  expect(countPositions(tracks)).toBe(descriptor.resources[0].rows);
  expect(tracks.dimensions).toBe(set.truth.dimensions);
  expect(tracks.samplingInterval).toBeCloseTo(Number(set.recording.interval), 12);
  expect(tracks.units).toEqual(study.units);

  // The last position of track 1 is the one the generator made, up to rounding in the table and whole periods.
  const made = set.simulateTrack(1).at(-1);
  const row = tracks.trackOffsets[tracks.trackNames.indexOf('1') + 1] - 1;
  const rounding = set.name === 'felt-table' ? 6e-6 : set.name === 'settling-beads' ? 6e-10 : 6e-3;
  for (let axis = 0; axis < tracks.dimensions; axis++) {
    const difference = tracks.positions[row * tracks.dimensions + axis] - (made?.place[axis] ?? Number.NaN);
    const period = tracks.periods[axis];
    const offset = period > 0 ? difference - period * Math.round(difference / period) : difference;
    expect(Math.abs(offset)).toBeLessThan(rounding);
  }
});

/** Parquet files written by pyarrow (test/reference/parquet/make.py) mean the same as the CSV beside them. */

import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { DataError } from '../../src/errors.js';
import { importTracks } from '../../src/import/importTracks.js';
import { describeTracks, failureOf, importText, sourceOf } from './sources.js';

const read = (name: string): Uint8Array =>
  new Uint8Array(readFileSync(new URL(`../reference/parquet/${name}`, import.meta.url)));

describe('a Parquet file', () => {
  it.each(['none', 'snappy', 'gzip', 'zstd', 'brotli', 'lz4'])(
    'is read like the CSV of the same table (compression: %s)',
    async (compression) => {
      const csv = await importText(read('tracks.csv'), { interval: 0.1 });
      const bytes = read(`tracks-${compression}.parquet`);
      const parquet = await importTracks([sourceOf(bytes, 'tracks.parquet', 100)], { interval: 0.1 });
      expect(describeTracks(parquet.tracks)).toEqual(describeTracks(csv.tracks));
      expect(parquet.tracks.samplingInterval).toBe(csv.tracks.samplingInterval);
      expect(parquet.counts).toEqual(csv.counts);
      expect(parquet.warnings).toEqual(csv.warnings);
    },
  );

  it('takes columns by --columns and refuses those that are not there', async () => {
    const bytes = read('tracks-snappy.parquet');
    const { tracks } = await importText(bytes, { columns: { x: 'y', track: 'track' }, interval: 1 });
    expect(tracks.dimensions).toBe(1);
    expect(tracks.positions.slice(0, 3)).toEqual(Float64Array.of(-2, -1.9375, -1.75));
    expect((await failureOf(bytes, { columns: { track: 'trak' } })).message).toMatch(/did you mean "track"/);
  });

  it('refuses missing and infinite numbers, or skips them, with the line they would have', async () => {
    const failure = await failureOf(read('gaps.parquet'));
    expect(failure).toBeInstanceOf(DataError);
    expect(failure.message).toMatch(/line 3, column x: the cell is empty/);
    const { counts, tracks } = await importText(read('gaps.parquet'), { skipInvalid: true });
    expect(counts).toMatchObject({ rows: 4, invalidSkipped: 2 });
    expect(tracks.positions).toEqual(Float64Array.of(1, 3.5));
  });

  it('refuses columns that hold no numbers', async () => {
    const failure = await failureOf(read('tracks-none.parquet'), { columns: { x: 'note' } });
    expect(failure.message).toMatch(/line 2, column note: .* is not a number/);
  });

  it('is refused in one sentence where it is damaged, wherever that is', async () => {
    const bytes = read('tracks-snappy.parquet');
    for (let cut = 8; cut < bytes.length; cut += 97) {
      const failure = await failureOf(bytes.subarray(0, cut));
      expect(failure).toBeInstanceOf(DataError);
      expect(failure.message).toMatch(/tracks\.csv: the Parquet data cannot be read/);
    }
  });
});

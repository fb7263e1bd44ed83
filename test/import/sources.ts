import type { WanderlawError } from '../../src/errors.js';
import type { ImportOptions, ImportResult, TrackSource } from '../../src/import/importTracks.js';
import { importTracks } from '../../src/import/importTracks.js';
import { countTracks, type TrackSet } from '../../src/tracks/TrackSet.js';

/** A source held in memory, handed out in chunks of the given number of bytes. */
export function sourceOf(
  content: string | Uint8Array,
  name = 'tracks.csv',
  chunkSize = 1 << 16,
): TrackSource {
  const bytes = typeof content === 'string' ? new TextEncoder().encode(content) : content;
  return {
    name,
    chunks: (async function* () {
      for (let start = 0; start < bytes.length; start += chunkSize)
        yield bytes.subarray(start, start + chunkSize);
    })(),
  };
}

export function importText(content: string | Uint8Array, options: ImportOptions = {}): Promise<ImportResult> {
  return importTracks([sourceOf(content)], options);
}

/** What importing a table throws; fails where it throws nothing. */
export async function failureOf(
  content: string | Uint8Array,
  options: ImportOptions = {},
): Promise<WanderlawError> {
  return failure(importText(content, options));
}

export async function failure(promise: Promise<unknown>): Promise<WanderlawError> {
  try {
    await promise;
  } catch (error) {
    return error as WanderlawError;
  }
  throw new Error('nothing was thrown');
}

/** Plain form of a track store, by track name: easy to compare and independent of the order of tracks. */
export function describeTracks(tracks: TrackSet): Record<string, unknown> {
  const { dimensions, trackOffsets, times, positions, localizationErrors: errors } = tracks;
  const entries: [string, unknown][] = [];
  for (let i = 0; i < countTracks(tracks); i++) {
    const [start, end] = [trackOffsets[i], trackOffsets[i + 1]];
    entries.push([
      tracks.trackNames[i],
      {
        times: Array.from(times.slice(start, end)),
        positions: Array.from(positions.slice(start * dimensions, end * dimensions)),
        errors: errors === null ? null : Array.from(errors.slice(start * dimensions, end * dimensions)),
        type: tracks.trackTypes === null ? null : tracks.trackTypes[i],
      },
    ]);
  }
  return Object.fromEntries(entries.sort(([a], [b]) => (a < b ? -1 : 1)));
}

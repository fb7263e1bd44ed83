/** Reading recordings: track files hashed while they stream into the importer. */

import { createHash, type Hash } from 'node:crypto';
import { statSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import type { FitDocument } from '../documents/FitDocument.js';
import type { Study } from '../documents/Study.js';
import { DataError, type Warning } from '../errors.js';
import { importTracks } from '../import/importTracks.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { explainSystemError, readChunks } from './files.js';
import type { Terminal } from './Terminal.js';

export interface Source {
  /** As the user wrote it. */
  readonly path: string;
  /** Of the bytes of the file, in hexadecimal. */
  readonly sha256: string;
}

export interface Recording {
  readonly tracks: TrackSet;
  readonly warnings: readonly Warning[];
  readonly counts: Readonly<Record<string, number>>;
  readonly sources: readonly Source[];
}

/**
 * Reads track tables; `-` stands for standard input.
 *
 * @param names  what the files are called in sentences and track names, where that differs from the path
 * @throws DataError  where a file cannot be read or holds no usable track table
 */
export async function readRecording(
  paths: readonly string[],
  study: Study,
  terminal: Terminal,
  names: readonly string[] = paths,
): Promise<Recording> {
  for (const path of paths) checkReadable(path, terminal);
  const hashes = paths.map(() => createHash('sha256'));
  const progress = await terminal.startProgress('reading');
  const total = BUILDING * measureBytes(paths, terminal);
  let done = 0;
  const count = (bytes: number): void => {
    done += bytes;
    progress.update(done, total);
  };
  const sources = paths.map((path, i) => ({
    name: names[i],
    chunks: hashChunks(path, hashes[i], terminal, count),
  }));
  const { tracks, warnings, counts } = await importTracks(sources, {
    columns: study.columns,
    interval: study.interval,
    lengthScale: study.lengthScale,
    timeScale: study.timeScale,
    units: study.units,
    period: study.period,
    skipInvalid: study.skipInvalid,
  }).finally(progress.stop);
  return {
    tracks,
    warnings,
    counts: { ...counts },
    sources: paths.map((path, i) => ({ path, sha256: hashes[i].digest('hex') })),
  };
}

/**
 * The bytes of a table that is read once, without a hash; `-` stands for standard input.
 *
 * @throws DataError  where it cannot be read
 */
export function openInput(path: string, terminal: Terminal): AsyncIterable<Uint8Array> {
  checkReadable(path, terminal);
  return hashChunks(path, createHash('sha256'), terminal);
}

function checkReadable(path: string, terminal: Terminal): void {
  if (path === '-') return;
  try {
    if (!statSync(terminal.resolve(path)).isDirectory()) return;
  } catch (error) {
    throw new DataError(`${path} cannot be read: ${explainSystemError(error)}; check the path`, { path });
  }
  throw new DataError(`${path} cannot be read: it is a directory; name the files in it`, { path });
}

/** Time of reading and building tracks over that of reading alone. */
const BUILDING = 1.2;

/** Of all files together; infinite where one is standard input, whose length nobody knows. */
function measureBytes(paths: readonly string[], terminal: Terminal): number {
  return paths.reduce(
    (sum, path) => sum + (path === '-' ? Infinity : statSync(terminal.resolve(path)).size),
    0,
  );
}

async function* hashChunks(
  path: string,
  hash: Hash,
  terminal: Terminal,
  count: (bytes: number) => void = () => {},
): AsyncGenerator<Uint8Array> {
  const chunks =
    path === '-'
      ? (terminal.streams.stdin as AsyncIterable<Uint8Array | string>)
      : readChunks(terminal.resolve(path));
  const iterator = chunks[Symbol.asyncIterator]();
  for (;;) {
    let next: IteratorResult<Uint8Array | string>;
    try {
      next = await iterator.next();
    } catch (error) {
      throw new DataError(`${path} cannot be read: ${explainSystemError(error)}`, { path });
    }
    if (next.done) return;
    const bytes = typeof next.value === 'string' ? Buffer.from(next.value) : next.value;
    hash.update(bytes);
    count(bytes.length);
    yield bytes;
  }
}

/**
 * Reads the tracks of a fit again, from where the fit file says or from `overrides`.
 *
 * A recorded path is tried from the working directory, from the directory of the fit file and those above it, and
 * beside the fit file; the hash decides.
 *
 * @param fitPath  absolute path of the fit file
 * @param overrides  one path per source, in the order of the fit
 * @throws DataError  where a file is missing, or is not the one that was fitted
 */
export async function readRecordingOfFit(
  fit: FitDocument,
  fitPath: string,
  overrides: readonly string[] | undefined,
  terminal: Terminal,
): Promise<Recording> {
  if (overrides !== undefined && overrides.length !== fit.sources.length) {
    throw new DataError(
      `--tracks names ${overrides.length} files where the fit was made from ${fit.sources.length}; give it once per file, in the order of the fit`,
      { given: overrides.length, needed: fit.sources.length },
    );
  }
  const paths: string[] = [];
  for (let i = 0; i < fit.sources.length; i++) {
    const source = fit.sources[i];
    const override = overrides?.[i];
    paths.push(
      await findSource(
        source,
        override === undefined ? listPlaces(source, fitPath, terminal) : [override],
        terminal,
      ),
    );
  }
  const names = fit.sources.map(({ path }) => path);
  return readRecording(paths, fit.study, terminal, names);
}

function listPlaces(source: Source, fitPath: string, terminal: Terminal): string[] {
  if (source.path === '-') {
    throw new DataError('the fit read its tracks from standard input; say with --tracks where they are now');
  }
  const places = [terminal.resolve(source.path)];
  for (let directory = dirname(fitPath); ; directory = dirname(directory)) {
    places.push(resolve(directory, source.path));
    if (directory === dirname(directory)) break;
  }
  places.push(join(dirname(fitPath), basename(source.path)));
  return [...new Set(places)].filter(isRegularFile);
}

/** A path in a fit file leads to files only: a device would be read without end. */
function isRegularFile(path: string): boolean {
  try {
    return statSync(path).isFile();
  } catch {
    return false; // not there, or no path at all
  }
}

async function findSource(source: Source, places: readonly string[], terminal: Terminal): Promise<string> {
  if (places.length === 0) {
    throw new DataError(
      `${source.path}, from which the fit was made, is not there; say with --tracks where it is now`,
      {
        path: source.path,
      },
    );
  }
  let found = '';
  for (const place of places) {
    checkReadable(place, terminal);
    found = await hashFile(place, terminal);
    if (found === source.sha256) return place;
  }
  throw new DataError(
    `${places[places.length - 1]} is not the file the fit was made from (SHA-256 ${found.slice(0, 12)}… instead of ${source.sha256.slice(0, 12)}…); name the original with --tracks, or fit again`,
    { path: places[places.length - 1], found, needed: source.sha256 },
  );
}

async function hashFile(path: string, terminal: Terminal): Promise<string> {
  const hash = createHash('sha256');
  const chunks = hashChunks(path, hash, terminal);
  while (!(await chunks.next()).done); // reading is what feeds the hash
  return hash.digest('hex');
}

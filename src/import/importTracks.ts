/**
 * The way in: track tables to a track store.
 *
 *     bytes → text (decodeText) → rows (readTable) → columns of numbers (RowCollector) → tracks (buildTracks)
 *     bytes of a Parquet file → rows (readParquet) ↗
 *
 * Opens no files: the caller hands in the bytes.
 */

import { DataError, UsageError, type Warning } from '../errors.js';
import { COORDINATE_NAMES, type TrackSet } from '../tracks/TrackSet.js';
import { NO_UNITS, type Units } from '../units.js';
import { buildTracks } from './buildTracks.js';
import { checkColumnMapping, writeMapping } from './columns.js';
import { isParquet, joinFirstBytes, type TrackSource } from './decodeText.js';
import { RowCollector } from './RowCollector.js';
import { readTable } from './table.js';
import { quoteCell } from './tableError.js';

export type { TrackSource } from './decodeText.js';

/** How the tables are to be read: the fields of a study that concern reading. All are optional. */
export interface ImportOptions {
  /** Role → column name, e.g. `{ track: 'ID' }`; default: columns are named after their roles. */
  readonly columns?: Readonly<Record<string, string>>;
  /** Time between frames where the column counts frames, in the table's unit of time (before `timeScale`). */
  readonly interval?: number | null;
  /** Factor from table lengths to lengths; default 1. */
  readonly lengthScale?: number;
  /** Factor from table times to times; default 1. */
  readonly timeScale?: number;
  /** Labels of the units after scaling; default none. */
  readonly units?: Units;
  /** Period of each axis after scaling, 0 = open; default: all open. */
  readonly period?: readonly number[] | null;
  /** Leave out and count rows in which a number is missing or infinite, instead of refusing them. */
  readonly skipInvalid?: boolean;
}

export interface ImportCounts {
  /** Rows read behind the headers, whatever became of them. */
  readonly rows: number;
  /** Rows left out because an equal one was there already. */
  readonly duplicatesDropped: number;
  /** Rows left out by `skipInvalid`. */
  readonly invalidSkipped: number;
}

export interface ImportResult {
  readonly tracks: TrackSet;
  readonly counts: ImportCounts;
  readonly warnings: readonly Warning[];
}

/**
 * Reads track tables into one track store.
 *
 * Tracks of different files are different tracks. Where files use the same track name, every name is written
 * `file:name`. A file without a track column is one track, named after the file.
 *
 * @param sources  at least one; read one after another
 * @throws UsageError  an option is out of its range, no source, or the same source twice
 * @throws DataError  the tables cannot be read or make no tracks; says file, line and column
 *
 * @example
 * const table = 'track,time,x\na,0,0.5\na,1,0.7\na,2,0.6\n';
 * const source = { name: 'tracks.csv', chunks: new Blob([table]).stream() }; // of a file: createReadStream(path)
 * const { tracks } = await importTracks([source], { units: { length: 'um', time: 's' } });
 * console.log(countTracks(tracks), countPositions(tracks)); // → 1 3
 */
export async function importTracks(
  sources: readonly TrackSource[],
  options: ImportOptions = {},
): Promise<ImportResult> {
  checkOptions(sources, options);
  const collector = new RowCollector(options.columns ?? {}, options.skipInvalid ?? false);
  for (const source of sources) {
    collector.openFile(source.name);
    await readSource(source, collector);
    collector.closeFile();
  }
  const rows = collector.collectRows();
  if (rows.trackOfRow.length === 0) {
    throw new DataError(
      `all ${collector.rowCount} rows were skipped as invalid; positions with finite numbers are needed`,
      { rows: collector.rowCount, invalidSkipped: collector.invalidCount },
    );
  }
  const warnings: Warning[] = [];
  const built = buildTracks(rows, {
    chooseTimeScale: (times, step) => chooseTimeScale(times, step, rows.countsFrames, options, warnings),
    lengthScale: options.lengthScale ?? 1,
    periods: checkPeriods(options.period ?? null, rows.dimensions),
    units: options.units ?? NO_UNITS,
  });
  const counts = {
    rows: collector.rowCount,
    duplicatesDropped: built.duplicatesDropped,
    invalidSkipped: collector.invalidCount,
  };
  const { prefixed, regularFraction } = built;
  warnings.push(...describeReading(collector, counts, prefixed, regularFraction));
  return { tracks: built.tracks, counts, warnings };
}

/** Reads one file, which says by its first bytes what it is. */
async function readSource(source: TrackSource, collector: RowCollector): Promise<void> {
  const chunks = joinFirstBytes(source.chunks);
  try {
    const first = await chunks.next();
    const whole = async function* (): AsyncGenerator<Uint8Array> {
      if (!first.done) yield first.value;
      yield* chunks;
    };
    const opened = { name: source.name, chunks: whole() };
    if (!first.done && isParquet(first.value)) {
      await (await import('./readParquet.js')).readParquet(opened, collector);
    } else {
      await readTable(opened, collector);
    }
  } finally {
    await chunks.return(undefined); // closes the source where reading ended early
  }
}

/** Steps that agree with `--interval` to this fraction mean the same interval. */
const AGREEMENT = 0.01;

/** Factor from the table's time column to times, with a warning where the reader has to guess. */
function chooseTimeScale(
  times: Float64Array,
  step: number,
  countsFrames: boolean,
  options: ImportOptions,
  warnings: Warning[],
): number {
  const timeScale = options.timeScale ?? 1;
  const interval = options.interval ?? null;
  if (countsFrames) {
    if (interval === null) {
      warnings.push({
        code: 'frames-without-interval',
        message:
          'the time column counts frames and no interval is given, so times are in frames (--interval)',
      });
    }
    return (interval ?? 1) * timeScale;
  }
  if (interval === null || Math.abs(step - interval) <= AGREEMENT * interval) return timeScale;
  if (times.every(Number.isInteger)) {
    warnings.push({
      code: 'time-read-as-frames',
      message:
        `the time column holds whole numbers and --interval ${interval} is given, so it is read as counting frames; ` +
        'leave --interval out if it holds times',
    });
    return interval * timeScale;
  }
  warnings.push({
    code: 'interval-ignored',
    message:
      `the time column holds times that are not whole numbers, with steps of ${step}, ` +
      `so --interval ${interval} is not used`,
  });
  return timeScale;
}

const FEW_REGULAR = 0.5; // below this fraction of regular steps most differences fall into no run

/** What the reader did that the user should know of. */
function describeReading(
  collector: RowCollector,
  { duplicatesDropped, invalidSkipped, rows }: ImportCounts,
  prefixed: boolean,
  regularFraction: number,
): Warning[] {
  const warnings: Warning[] = [];
  const warn = (code: string, message: string): void => void warnings.push({ code, message });
  const untracked = collector.untrackedFiles;
  if (untracked.length === 1)
    warn('no-track-column', `${untracked[0]} has no track column and is read as one track`);
  else if (untracked.length > 1) {
    warn('no-track-column', `${untracked.length} files have no track column and are read as one track each`);
  }
  if (prefixed) warn('shared-track-names', 'files use the same track names, so tracks are named file:track');
  if (collector.leftOutColumns.size > 0) {
    const left = [...collector.leftOutColumns].join(', ');
    warn(
      'coordinates-left-out',
      `the columns mapped by --columns are all the coordinates; not used: ${left}`,
    );
  }
  for (const miss of collector.nearMisses.values()) {
    const { role, column } = miss;
    warn(
      'column-not-used',
      `column ${quoteCell(column)} is not used; if it is what ${role} means, say --columns ${writeMapping(miss)}`,
    );
  }
  if (duplicatesDropped > 0) {
    warn(
      'duplicates-dropped',
      `${countRows(duplicatesDropped)} repeated another with equal content and ${duplicatesDropped === 1 ? 'was' : 'were'} dropped`,
    );
  }
  if (invalidSkipped > 0) {
    warn(
      'invalid-skipped',
      `${countRows(invalidSkipped)} of ${rows} had missing or infinite numbers and ${invalidSkipped === 1 ? 'was' : 'were'} skipped`,
    );
  }
  if (regularFraction < FEW_REGULAR) {
    const percent = Math.round(100 * regularFraction);
    warn('uneven-times', `only ${percent} % of the steps are a whole number of sampling intervals long`);
  }
  return warnings;
}

function countRows(count: number): string {
  return count === 1 ? '1 row' : `${count} rows`;
}

function checkOptions(sources: readonly TrackSource[], options: ImportOptions): void {
  if (sources.length === 0) throw new UsageError('no track table is given; name at least one file');
  const names = sources.map(({ name }) => name);
  const twice = names.find((name, i) => names.indexOf(name) !== i);
  if (twice !== undefined) {
    throw new UsageError(`${twice} is given twice; each file may be read once only`, { file: twice });
  }
  checkColumnMapping(options.columns ?? {});
  checkPositive('interval', 'a time', options.interval ?? 1);
  checkPositive('length-scale', 'a factor', options.lengthScale ?? 1);
  checkPositive('time-scale', 'a factor', options.timeScale ?? 1);
}

function checkPositive(option: string, what: string, value: number): void {
  if (value > 0 && value < Infinity) return;
  throw new UsageError(`--${option} is ${what} and must be above 0, got ${value}`, { option, value });
}

/** @returns one period per dimension */
function checkPeriods(period: readonly number[] | null, dimensions: number): readonly number[] {
  if (period === null) return new Array<number>(dimensions).fill(0);
  if (period.length !== dimensions) {
    const axes = COORDINATE_NAMES.slice(0, dimensions).join(', ');
    throw new UsageError(
      `--period names ${period.length} ${period.length === 1 ? 'axis' : 'axes'} but the tracks have ${dimensions} ` +
        `(${axes}); give one length per axis, 0 where it is open`,
      { option: 'period', found: period.length, expected: dimensions },
    );
  }
  const wrong = period.find((value) => !(value >= 0 && value < Infinity));
  if (wrong !== undefined) {
    throw new UsageError(`--period ${quoteCell(String(wrong))} is not a length; give 0 or above per axis`, {
      option: 'period',
      value: wrong,
    });
  }
  return [...period];
}

/** Collected rows to the track store: grouped, sorted, duplicates dropped, scaled, unwrapped. */

import { writeMapping } from './columns.js';
import { DataError } from '../errors.js';
import { COORDINATE_NAMES, type TrackSet } from '../tracks/TrackSet.js';
import type { Units } from '../units.js';
import type { CollectedRows } from './RowCollector.js';
import { checkResolution } from './checkResolution.js';
import { estimateSamplingInterval, SAME_TIME } from './samplingInterval.js';
import { quoteCell, tableError } from './tableError.js';
import { unwrapInto } from './unwrapPeriodic.js';

export interface BuildOptions {
  /** Factor from the table's times or frames to times, told from them and their dominant step. */
  readonly chooseTimeScale: (times: Float64Array, step: number) => number;
  readonly lengthScale: number;
  /** Length d, after scaling; 0 where the axis is open. */
  readonly periods: readonly number[];
  readonly units: Units;
}

export interface BuiltTracks {
  readonly tracks: TrackSet;
  readonly duplicatesDropped: number;
  /** See IntervalEstimate. */
  readonly regularFraction: number;
  /** Whether tracks of different files had equal names, so that file names had to tell them apart. */
  readonly prefixed: boolean;
}

/**
 * Makes the track store of all rows of all files.
 *
 * Rows of a track at the same time (up to rounding) must say the same and are then counted once.
 *
 * @throws DataError  rows that contradict each other, a single time in the whole table, no track with two positions,
 *                    positions that never change, values beyond double precision after scaling or too large beside the
 *                    others
 *
 * Cost     O(n) where rows come sorted, else O(n log n) for the unsorted tracks; about three copies of the table.
 */
export function buildTracks(rows: CollectedRows, options: BuildOptions): BuiltTracks {
  const { dimensions, numbers, tracks: collected } = rows;
  const tableTimes = extractTimes(rows);
  checkTimesDiffer(tableTimes, rows);
  const sorted = sortRows(rows, tableTimes);
  const interval = estimateSamplingInterval(sorted.times, sorted.offsets);
  if (interval === null) throw singlePositionsError(rows);
  const timeScale = options.chooseTimeScale(tableTimes, interval.samplingInterval);

  const { order, offsets, times } = dropDuplicates(rows, sorted, interval.samplingInterval);
  const count = order.length;
  const width = rowWidth(rows);
  const positions = new Float64Array(count * dimensions);
  const errors = rows.hasErrors ? new Float64Array(count * dimensions) : null;
  const concentrations = rows.hasConcentrations ? new Float64Array(count) : null;
  for (let i = 0; i < count; i++) {
    const start = order[i] * width + 1;
    times[i] *= timeScale;
    if (concentrations !== null) concentrations[i] = numbers[order[i] * width + width - 1];
    for (let axis = 0; axis < dimensions; axis++) {
      positions[i * dimensions + axis] = numbers[start + axis] * options.lengthScale;
      if (errors === null) continue;
      errors[i * dimensions + axis] = numbers[start + dimensions + axis] * options.lengthScale;
    }
  }
  checkFinite(times, 'times', 'time');
  checkFinite(positions, 'positions', 'length');
  checkMotion(positions, offsets, dimensions, rows);
  checkResolution(times, [rows.countsFrames ? 'frame' : 'time'], { order, offsets }, rows);
  checkResolution(positions, COORDINATE_NAMES.slice(0, dimensions), { order, offsets }, rows);
  unwrapInto(positions, offsets, options.periods);

  const prefixed = haveSharedNames(rows);
  return {
    tracks: {
      dimensions,
      coordinates: COORDINATE_NAMES.slice(0, dimensions),
      trackNames: collected.map(({ name, file }) => (prefixed && name !== file ? `${file}:${name}` : name)),
      trackOffsets: offsets,
      times,
      positions,
      localizationErrors: errors,
      ...(concentrations === null ? {} : { concentrations }),
      trackTypes: rows.hasTypes ? collected.map(({ type }) => type ?? '') : null,
      samplingInterval: interval.samplingInterval * timeScale,
      periods: options.periods,
      units: options.units,
    },
    duplicatesDropped: sorted.order.length - count,
    regularFraction: interval.regularFraction,
    prefixed,
  };
}

/** Numbers per row. */
function rowWidth({ dimensions, hasErrors, hasConcentrations }: CollectedRows): number {
  return 1 + (hasErrors ? 2 : 1) * dimensions + (hasConcentrations ? 1 : 0);
}

function extractTimes(rows: CollectedRows): Float64Array {
  const width = rowWidth(rows);
  const times = new Float64Array(rows.trackOfRow.length);
  for (let row = 0; row < times.length; row++) times[row] = rows.numbers[row * width];
  return times;
}

interface SortedRows {
  /** Rows by track, and within a track by time. */
  readonly order: Int32Array;
  /** Length m + 1: the places in `order` where tracks begin. */
  readonly offsets: Int32Array;
  /** As in the table, in this order. */
  readonly times: Float64Array;
}

/** Counting sort by track; then each track by time, where it is not sorted already. */
function sortRows({ trackOfRow, tracks }: CollectedRows, tableTimes: Float64Array): SortedRows {
  const offsets = new Int32Array(tracks.length + 1);
  for (let row = 0; row < trackOfRow.length; row++) offsets[trackOfRow[row] + 1]++;
  for (let track = 0; track < tracks.length; track++) offsets[track + 1] += offsets[track];
  const next = offsets.slice();
  const order = new Int32Array(trackOfRow.length);
  for (let row = 0; row < trackOfRow.length; row++) order[next[trackOfRow[row]]++] = row;
  for (let track = 0; track < tracks.length; track++) {
    const part = order.subarray(offsets[track], offsets[track + 1]);
    let sorted = true;
    for (let i = 1; i < part.length && sorted; i++) sorted = tableTimes[part[i]] >= tableTimes[part[i - 1]];
    if (!sorted) part.sort((a, b) => tableTimes[a] - tableTimes[b]);
  }
  const times = new Float64Array(order.length);
  for (let i = 0; i < order.length; i++) times[i] = tableTimes[order[i]];
  return { order, offsets, times };
}

/** Leaves out rows that repeat the time of the row before; those must repeat everything else too. */
function dropDuplicates(rows: CollectedRows, sorted: SortedRows, samplingInterval: number): SortedRows {
  const { order, offsets, times } = sorted;
  const kept = new Int32Array(order.length);
  const keptOffsets = new Int32Array(offsets.length);
  let count = 0;
  for (let track = 0; track + 1 < offsets.length; track++) {
    let last = -1; // place of the last row kept
    for (let i = offsets[track]; i < offsets[track + 1]; i++) {
      // Two times within a few roundings are one time written twice, whatever the interval.
      const rounding = 4 * Number.EPSILON * Math.abs(times[i]);
      if (last !== -1 && times[i] - times[last] <= Math.max(SAME_TIME * samplingInterval, rounding)) {
        if (!sayTheSame(rows, order[last], order[i])) throw conflictError(rows, order[last], order[i]);
        continue;
      }
      kept[count++] = i;
      last = i;
    }
    keptOffsets[track + 1] = count;
  }
  if (count === order.length) return sorted;
  const places = kept.subarray(0, count);
  return {
    order: places.map((i) => order[i]),
    offsets: keptOffsets,
    times: Float64Array.from(places, (i) => times[i]),
  };
}

function sayTheSame(rows: CollectedRows, first: number, second: number): boolean {
  const width = rowWidth(rows);
  for (let i = 1; i < width; i++) {
    if (rows.numbers[first * width + i] !== rows.numbers[second * width + i]) return false;
  }
  return true;
}

function conflictError(rows: CollectedRows, first: number, second: number): DataError {
  const { name, file } = rows.tracks[rows.trackOfRow[first]];
  const lines = [rows.lines[first], rows.lines[second]].sort((a, b) => a - b);
  const time = rows.numbers[first * rowWidth(rows)];
  const moment = `${rows.countsFrames ? 'frame' : 'time'} ${time}`;
  const place = `${moment} (lines ${lines[0]} and ${lines[1]})`;
  const sentence =
    name === file
      ? `the file has no track column and two different positions at ${place}; keep one, or name the column that tells ` +
        `tracks apart with --columns ${writeMapping(rows.trackColumn ?? { role: 'track', column: 'NAME' })}`
      : `track ${quoteCell(name)} has two different positions at ${place}; keep one`;
  return tableError({ file }, sentence, { track: name, time, lines });
}

function checkTimesDiffer(times: Float64Array, { countsFrames }: CollectedRows): void {
  for (let row = 1; row < times.length; row++) if (times[row] !== times[0]) return;
  throw new DataError(
    `${times.length === 1 ? 'there is one position only, at' : `all ${times.length} positions are at the same`} ${countsFrames ? 'frame' : 'time'} ${times[0]}; ` +
      'tracks need positions at several times (is the right column used? see --columns)',
    { time: times[0] },
  );
}

function singlePositionsError({ tracks }: CollectedRows): DataError {
  return new DataError(
    `none of the ${tracks.length} tracks has positions at two different times; ` +
      'use the column that names the tracks (--columns track=NAME)',
    { tracks: tracks.length },
  );
}

/** Frozen tables are refused: nothing can be learnt from particles of which none ever moves. */
function checkMotion(
  positions: Float64Array,
  offsets: Int32Array,
  dimensions: number,
  rows: CollectedRows,
): void {
  for (let track = 0; track + 1 < offsets.length; track++) {
    for (let i = (offsets[track] + 1) * dimensions; i < offsets[track + 1] * dimensions; i++) {
      if (positions[i] !== positions[i - dimensions]) return;
    }
  }
  throw new DataError(
    `no position ever changes within a track (${rows.tracks.length} ${rows.tracks.length === 1 ? 'track' : 'tracks'}, ` +
      `${rows.trackOfRow.length} rows); tracks of moving particles are needed (are the right columns used? see --columns)`,
    { tracks: rows.tracks.length },
  );
}

function checkFinite(values: Float64Array, what: string, scale: string): void {
  for (let i = 0; i < values.length; i++) {
    if (values[i] - values[i] === 0) continue;
    throw new DataError(
      `${what} become too large for numbers in double precision; use a smaller --${scale}-scale`,
    );
  }
}

/** Whether two files have tracks of the same name. */
function haveSharedNames({ tracks }: CollectedRows): boolean {
  return new Set(tracks.map(({ name }) => name)).size < tracks.length;
}

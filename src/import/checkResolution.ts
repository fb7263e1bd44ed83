/** Refuses numbers so large that double precision cannot tell their neighbours apart, naming the line of the largest. */

import type { CollectedRows } from './RowCollector.js';
import { tableError } from './tableError.js';

/** Roundings of the largest number: steps below are known to less than a digit. */
const LOST = 10 * Number.EPSILON;

/** Sorted rows of a table, as they come to be checked. */
export interface CheckedRows {
  /** Length n: number of each row in the collected ones. */
  readonly order: Int32Array;
  /** Length m + 1: where tracks begin. */
  readonly offsets: Int32Array;
}

/**
 * Checks that most steps within tracks are larger than the rounding of the largest value. A marker such as 1e308 for
 * a position that was not found would otherwise drown everything that is computed from the positions.
 *
 * @param values  shape (n, width), in the order of `sorted`: positions, or times
 * @param names  of the columns, as they are told
 * @throws DataError  naming file and line of the largest value
 */
export function checkResolution(
  values: Float64Array,
  names: readonly string[],
  sorted: CheckedRows,
  rows: CollectedRows,
): void {
  const width = names.length;
  let largest = 0;
  for (let i = 0; i < values.length; i++) if (Math.abs(values[i]) > Math.abs(values[largest])) largest = i;
  const least = LOST * Math.abs(values[largest]);
  let moving = 0;
  let lost = 0;
  for (let track = 0; track + 1 < sorted.offsets.length; track++) {
    for (let i = (sorted.offsets[track] + 1) * width; i < sorted.offsets[track + 1] * width; i++) {
      const step = Math.abs(values[i] - values[i - width]);
      if (step > 0) moving++;
      if (step > 0 && step < least) lost++;
    }
  }
  if (2 * lost <= moving) return;
  const row = sorted.order[Math.floor(largest / width)];
  const name = names[largest % width];
  throw tableError(
    { file: rows.tracks[rows.trackOfRow[row]].file, line: rows.lines[row] },
    `${name} is ${values[largest]}, beside which double precision cannot tell the other rows apart; ` +
      'correct that line or take it out, or subtract a constant where all rows are like it',
    { name, value: values[largest] },
  );
}

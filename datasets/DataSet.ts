/** What the generator needs to know of a data set: how a track comes about, how the table looks, and what it says. */

import type { StudyInput } from '../src/documents/Study.js';
import type { DataSetName, Truth } from './truth.js';

/** One recorded position. */
export interface RecordedPosition {
  /** Number of the track, from 1. */
  readonly track: number;
  /** Frame number, from 0. */
  readonly frame: number;
  /** Recorded coordinates, with localization error, in table units. */
  readonly place: readonly number[];
}

/** A column of the table, as a field of a Frictionless Table Schema. */
export interface ColumnDescription {
  readonly name: string;
  readonly type: 'integer' | 'number';
  readonly decimalChar?: ',';
  readonly unit?: string;
  readonly description: string;
}

export interface DataSet {
  readonly name: DataSetName;
  readonly title: string;
  readonly description: string;
  /** The question the table answers. */
  readonly question: string;
  readonly seed: number;
  readonly trackCount: number;
  /** Substeps of the time stepping per frame. */
  readonly substeps: number;
  /** Recording conditions worth knowing when a fit is judged; table units. */
  readonly recording: Readonly<Record<string, number | string>>;
  readonly delimiter: ',' | ';' | '\t';
  /** Comment lines above the header, without the leading `#`. */
  readonly comments: readonly string[];
  readonly columns: readonly ColumnDescription[];
  /** Order of the rows: track after track, or frame after frame as a camera sees them. */
  readonly rowOrder: 'tracks' | 'frames';
  readonly truth: Truth;
  /** The options `fit` needs to read the table, as a study. */
  readonly study: StudyInput;
  /** Simulates and records one track; `track` from 1, the result depends on it and the seed alone. */
  simulateTrack(track: number): RecordedPosition[];
  /** The cells of one row, in column order. */
  formatRow(position: RecordedPosition): string[];
}

/** A number with a fixed count of decimals, never `-0`. */
export function formatDecimals(value: number, decimals: number): string {
  const text = value.toFixed(decimals);
  return Number(text) === 0 ? (0).toFixed(decimals) : text;
}

/** Rows of cells from any number of files to flat columns of numbers, each cell checked on the way. */

import type { Dialect } from './dialect.js';
import { findColumns, type TableColumns, type NearMiss } from './columns.js';
import { growFloats, growIntegers } from './GrowableArray.js';
import { classifyCell, parsePlainNumber } from './parseNumber.js';
import type { TableConsumer } from './table.js';
import { quoteCell, tableError } from './tableError.js';

const POINT = 46; // character code of the decimal point
const COMMA = 44;

/** What stands in a row under a column: text, or a number where the file holds numbers as such. */
export type Cell = string | number;

/** A track as first met: tracks of different files are different tracks. */
export interface CollectedTrack {
  readonly name: string;
  readonly file: string;
  readonly type: string | null;
  readonly firstLine: number;
}

/** What the rows of all files hold, in file order; n rows, d dimensions. */
export interface CollectedRows {
  readonly dimensions: number;
  readonly countsFrames: boolean;
  readonly hasTypes: boolean;
  readonly tracks: readonly CollectedTrack[];
  /** Length n: index into `tracks`. */
  readonly trackOfRow: Int32Array;
  /** Length n: line in the track's file. */
  readonly lines: Int32Array;
  readonly hasErrors: boolean;
  readonly hasConcentrations: boolean;
  /** A column that may have been meant to tell tracks apart. */
  readonly trackColumn: NearMiss | null;
  /** Per row: time or frame, d coordinates, d errors if there are any, concentration if there is one, as in the table. */
  readonly numbers: Float64Array;
}

/** Takes the tables of several files one after another; all must have the same kinds of columns. */
export class RowCollector implements TableConsumer {
  /** Rows read, invalid ones included. */
  rowCount = 0;
  /** Rows left out because a number in them is missing or infinite. */
  invalidCount = 0;
  /** Files without a track column. */
  readonly untrackedFiles: string[] = [];
  /** Coordinate columns the mapping left out, of all files. */
  readonly leftOutColumns = new Set<string>();
  /** Columns that may have been meant for a role, of all files, by role. */
  readonly nearMisses = new Map<string, NearMiss>();

  readonly #mapping: Readonly<Record<string, string>>;
  readonly #skipInvalid: boolean;
  readonly #tracks: CollectedTrack[] = [];
  readonly #trackOfRow = growIntegers();
  readonly #lines = growIntegers();
  readonly #numbers = growFloats();

  #firstTable: { columns: TableColumns; file: string } | null = null;
  #file = '';
  #columns: TableColumns | null = null;
  #rowsOfFile = 0;
  #headerLine = 0;
  /** Decimal mark of the file; 0 while it may still turn out to be a comma. */
  #mark = POINT;
  #markLine = 0;
  #numberPlaces: readonly number[] = [];
  /** Where each cell of a row ends in its text. */
  #cellEnds = new Int32Array(0);
  readonly #tracksOfFile = new Map<string, number>();
  #previousName: string | null = null;
  #previousTrack = -1;

  constructor(mapping: Readonly<Record<string, string>>, skipInvalid: boolean) {
    this.#mapping = mapping;
    this.#skipInvalid = skipInvalid;
  }

  /** Begins the next file. */
  openFile(file: string): void {
    this.#file = file;
    this.#columns = null;
    this.#rowsOfFile = 0;
    this.#tracksOfFile.clear();
    this.#previousName = null;
  }

  readHeader(cells: readonly string[], line: number, dialect: Dialect): void {
    const columns = findColumns(cells, this.#mapping, this.#file, line);
    this.#checkAgreement(columns, line);
    this.#columns = columns;
    this.#cellEnds = new Int32Array(columns.names.length);
    this.#headerLine = line;
    this.#mark = dialect.decimalCommas ? 0 : POINT;
    this.#markLine = 0;
    const concentration = columns.concentration === -1 ? [] : [columns.concentration];
    this.#numberPlaces = [columns.time, ...columns.coordinates, ...(columns.errors ?? []), ...concentration];
    if (columns.track === -1) this.untrackedFiles.push(this.#file);
    for (const name of columns.leftOut) this.leftOutColumns.add(name);
    for (const miss of columns.nearMisses) this.nearMisses.set(miss.role, miss);
  }

  /** @param cells  numbers where the table holds numbers and not their digits */
  readRow(cells: readonly Cell[], line: number): void {
    const columns = this.#columns;
    if (columns === null) return;
    if (cells.length !== columns.names.length) {
      if (isBlank(cells)) return;
      this.#refuseWidth(cells.length, columns.names.length, line);
    }
    const places = this.#numberPlaces;
    if (cells[places[0]] === '' && isBlank(cells)) return; // the empty last rows of a spreadsheet
    this.rowCount++;
    this.#rowsOfFile++;

    const name = columns.track === -1 ? this.#file : textOf(cells[columns.track]);
    let valid = name !== this.#previousName && name.trim() === '' ? this.#skipEmptyName(columns, line) : true;
    const width = places.length;
    this.#numbers.reserve(width);
    const { values, length: start } = this.#numbers;
    for (let i = 0; i < width; i++) {
      const cell = cells[places[i]];
      let value = typeof cell === 'number' ? cell : parsePlainNumber(cell, this.#mark);
      if (value - value !== 0) value = this.#readUnusual(textOf(cell), places[i], line); // NaN or infinite
      if (value !== value) valid = false;
      values[start + i] = value;
    }
    if (!valid) {
      this.invalidCount++;
      return;
    }
    if (columns.countsFrames && !Number.isInteger(values[start]))
      this.#refuseFrame(textOf(cells[places[0]]), line);
    const firstError = 1 + columns.coordinates.length;
    for (let i = firstError; i < firstError + (columns.errors?.length ?? 0); i++) {
      if (values[start + i] < 0) this.#refuseError(textOf(cells[places[i]]), places[i], line);
    }
    this.#trackOfRow.push(this.#findTrack(name, columns, cells, line));
    this.#lines.push(line);
    this.#numbers.length = start + width;
  }

  readPlainRow(text: string, start: number, end: number, delimiter: number, line: number): void {
    if (!this.#readUsualRow(text, start, end, delimiter, line)) {
      const cells = text.slice(start, end).split(String.fromCharCode(delimiter));
      if (cells.length > 1 || cells[0].trim() !== '') this.readRow(cells, line);
    }
  }

  /**
   * Takes a row that is like almost all others: as many cells as the header, plain numbers, the track of the row before.
   *
   * @returns false, with nothing taken, where the row is not like that
   */
  #readUsualRow(text: string, start: number, end: number, delimiter: number, line: number): boolean {
    const columns = this.#columns;
    const track = this.#previousTrack;
    const name = this.#previousName;
    if (columns === null || name === null || columns.type !== -1) return false;
    const ends = this.#cellEnds;
    let count = 0;
    for (let place = start; place < end; place++) {
      if (text.charCodeAt(place) !== delimiter) continue;
      if (count === ends.length) return false;
      ends[count++] = place;
    }
    if (count !== ends.length - 1) return false;
    ends[count] = end;
    if (columns.track !== -1) {
      const from = columns.track === 0 ? start : ends[columns.track - 1] + 1;
      if (ends[columns.track] - from !== name.length || !text.startsWith(name, from)) return false;
    }
    const places = this.#numberPlaces;
    const firstError = 1 + columns.coordinates.length;
    const lastError = firstError + (columns.errors?.length ?? 0);
    this.#numbers.reserve(places.length);
    const { values, length: at } = this.#numbers;
    for (let i = 0; i < places.length; i++) {
      const from = places[i] === 0 ? start : ends[places[i] - 1] + 1;
      const value = parsePlainNumber(text, this.#mark, from, ends[places[i]]);
      if (value - value !== 0) return false; // NaN or infinite
      if (value < 0 && i >= firstError && i < lastError) return false;
      values[at + i] = value;
    }
    if (columns.countsFrames && !Number.isInteger(values[at])) return false;
    this.rowCount++;
    this.#rowsOfFile++;
    this.#trackOfRow.push(track);
    this.#lines.push(line);
    this.#numbers.length = at + places.length;
    return true;
  }

  /** @throws DataError  the file has a header but no rows */
  closeFile(): void {
    if (this.#rowsOfFile > 0) return;
    throw tableError(
      { file: this.#file, line: this.#headerLine },
      'behind the header there is not a single row; one position per row is needed',
    );
  }

  /** Columns of the open file that are read, counted from 0. */
  usedColumns(): number[] {
    const columns = this.#columns;
    if (columns === null) return [];
    return [columns.track, columns.type, ...this.#numberPlaces].filter((column) => column !== -1);
  }

  /** The rows of all files; a view on the collector's arrays. */
  collectRows(): CollectedRows {
    const columns = this.#firstTable?.columns;
    return {
      dimensions: columns?.coordinates.length ?? 0,
      countsFrames: columns?.countsFrames ?? false,
      hasTypes: (columns?.type ?? -1) !== -1,
      tracks: this.#tracks,
      trackOfRow: this.#trackOfRow.view(),
      lines: this.#lines.view(),
      hasErrors: (columns?.errors ?? null) !== null,
      hasConcentrations: (columns?.concentration ?? -1) !== -1,
      trackColumn: this.nearMisses.get('track') ?? null,
      numbers: this.#numbers.view(),
    };
  }

  #findTrack(name: string, columns: TableColumns, cells: readonly Cell[], line: number): number {
    if (name !== this.#previousName) {
      let track = this.#tracksOfFile.get(name);
      if (track === undefined) {
        track = this.#tracks.length;
        const kept = copyText(name);
        const type = columns.type === -1 ? null : copyText(textOf(cells[columns.type]));
        this.#tracks.push({ name: kept, file: this.#file, type, firstLine: line });
        this.#tracksOfFile.set(kept, track);
      }
      this.#previousName = name;
      this.#previousTrack = track;
    }
    if (columns.type !== -1 && textOf(cells[columns.type]) !== this.#tracks[this.#previousTrack].type) {
      const { type, firstLine } = this.#tracks[this.#previousTrack];
      throw tableError(
        { file: this.#file, line, column: columns.names[columns.type] },
        `track ${quoteCell(name)} is of type ${quoteCell(textOf(cells[columns.type]))} here but of type ` +
          `${quoteCell(type ?? '')} on line ${firstLine}; a track has one type`,
        { track: name, lines: [firstLine, line] },
      );
    }
    return this.#previousTrack;
  }

  /** A cell with blanks around its number, a first decimal mark, or no number at all; NaN where it is skipped. */
  #readUnusual(cell: string, place: number, line: number): number {
    const text = cell.trim();
    const marks = this.#mark === 0 ? [POINT, COMMA] : [this.#mark];
    for (const mark of marks) {
      const value = parsePlainNumber(text, mark);
      if (!Number.isFinite(value)) continue;
      if (this.#mark === 0 && text.includes(String.fromCharCode(mark)))
        [this.#mark, this.#markLine] = [mark, line];
      return value;
    }
    const kind = classifyCell(text, this.#mark);
    if (kind === 'missing' && this.#skipInvalid) return NaN;
    const column = this.#columns?.names[place] ?? '';
    throw tableError({ file: this.#file, line, column }, this.#explainCell(text, kind), { value: text });
  }

  #explainCell(text: string, kind: ReturnType<typeof classifyCell>): string {
    if (kind === 'missing') {
      const found = text === '' ? 'the cell is empty' : `${quoteCell(text)} is not a finite number`;
      return `${found}; correct it, or leave such rows out with --skip-invalid`;
    }
    if (kind === 'text')
      return `${quoteCell(text)} is not a number; correct it or name another column with --columns`;
    const other = this.#mark === COMMA ? POINT : COMMA;
    if (this.#markLine > 0 && Number.isFinite(parsePlainNumber(text, other))) {
      const [here, there] = other === COMMA ? ['comma', 'point'] : ['point', 'comma'];
      return (
        `${quoteCell(text)} has a ${here} but line ${this.#markLine} a decimal ${there}; ` +
        'use one decimal mark throughout and no thousands separators'
      );
    }
    return (
      `${quoteCell(text)} is not read as a number: thousands separators are not allowed, ` +
      'and decimal commas only where semicolons or tabs separate the cells; write it like 1234.5'
    );
  }

  /** All files must be tables of the same kind, or their rows would not make one set of tracks. */
  #checkAgreement(columns: TableColumns, line: number): void {
    if (this.#firstTable === null) {
      this.#firstTable = { columns, file: this.#file };
      return;
    }
    const { columns: first, file } = this.#firstTable;
    const differences: [boolean, string][] = [
      [
        columns.coordinates.length !== first.coordinates.length,
        `there are ${columns.coordinates.length} coordinates but ${first.coordinates.length} in ${file}`,
      ],
      [
        columns.countsFrames !== first.countsFrames,
        `one of this file and ${file} has times, the other frames`,
      ],
      [(columns.type === -1) !== (first.type === -1), `only one of this file and ${file} has a type column`],
      [
        (columns.errors === null) !== (first.errors === null),
        `only one of this file and ${file} has error columns`,
      ],
    ];
    for (const [differs, finding] of differences) {
      if (differs) {
        throw tableError({ file: this.#file, line }, `${finding}; read them separately or make them alike`, {
          other: file,
        });
      }
    }
  }

  #skipEmptyName(columns: TableColumns, line: number): boolean {
    if (this.#skipInvalid) return false;
    throw tableError(
      { file: this.#file, line, column: columns.names[columns.track] },
      'the cell is empty; name the track, or leave such rows out with --skip-invalid',
      { value: '' },
    );
  }

  #refuseWidth(found: number, expected: number, line: number): never {
    const cells = found === 1 ? '1 cell' : `${found} cells`;
    const remedy =
      found < expected
        ? 'fill in the missing ones'
        : 'remove what is too much, or quote cells that hold delimiters';
    throw tableError(
      { file: this.#file, line },
      `the row has ${cells} but the header ${expected}; ${remedy}`,
      {
        found,
        expected,
      },
    );
  }

  #refuseFrame(cell: string, line: number): never {
    const column = this.#columns?.names[this.#numberPlaces[0]] ?? '';
    throw tableError(
      { file: this.#file, line, column },
      `frame ${quoteCell(cell)} is not a whole number; if these are times, say --columns time=${column}`,
      { value: cell },
    );
  }

  #refuseError(cell: string, place: number, line: number): never {
    throw tableError(
      { file: this.#file, line, column: this.#columns?.names[place] ?? '' },
      `the error ${quoteCell(cell)} is negative; errors are standard deviations, 0 or above`,
      { value: cell },
    );
  }
}

function isBlank(cells: readonly Cell[]): boolean {
  return cells.every((cell) => typeof cell === 'string' && cell.trim() === '');
}

function textOf(cell: Cell): string {
  return typeof cell === 'string' ? cell : String(cell);
}

/** A string of its own: cells are views on a whole piece of the file, which they would keep in memory. */
function copyText(text: string): string {
  return Buffer.from(text, 'utf16le').toString('utf16le');
}

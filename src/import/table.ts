/** A delimited text file to rows of cells with their line numbers, in streaming fashion. */

import Papa from 'papaparse';
import { cleanLines, countLineBreaks } from './cleanLines.js';
import { decodeText, type TrackSource, UndecodableText } from './decodeText.js';
import { type Dialect, detectDialect } from './dialect.js';
import { tableError } from './tableError.js';

/** What a table is read for. Cells are only good until the call returns: copy what is kept. */
export interface TableConsumer {
  /** Called once, with the header cells. */
  readHeader(cells: readonly string[], line: number, dialect: Dialect): void;
  /** Called for every row behind the header that is not an empty line; the number of cells is as found. */
  readRow(cells: readonly string[], line: number): void;
  /**
   * The same for a row that holds no quotes, without cutting it up: the row stands in the text from `start` to `end`.
   * Consumers that have no use for it leave it out.
   */
  readPlainRow?(text: string, start: number, end: number, delimiter: number, line: number): void;
}

interface ParsedPiece {
  readonly data: readonly (readonly string[])[];
  readonly errors: readonly { readonly code: string; readonly row: number }[];
  readonly meta: { readonly cursor: number };
}

const LONGEST_RECORD = 1 << 20; // characters; longer "rows" are an unclosed quote or no table at all

/**
 * Reads a whole source, row by row in file order.
 *
 * Line breaks may be LF, CRLF or CR; lines that begin with `#` and empty lines are passed over (and counted as
 * lines); quoted cells may hold delimiters, doubled quotes and line breaks. A row's line is where it begins.
 *
 * Cost     one pass; memory for one piece of the file (decodeText) and one record.
 *
 * @throws DataError  empty file, NUL bytes, undecodable text, faulty quotes, a record that does not end
 */
export async function readTable(source: TrackSource, consumer: TableConsumer): Promise<void> {
  const parser = new TableParser(source.name, consumer);
  try {
    for await (const text of decodeText(source)) parser.parse(text, false);
  } catch (error) {
    if (!(error instanceof UndecodableText)) throw error;
    throw tableError(
      { file: source.name, line: parser.currentLine() },
      `the bytes are not ${error.encoding} text; save the table as plain text in UTF-8`,
    );
  }
  parser.parse('', true);
}

class TableParser {
  readonly #file: string;
  readonly #consumer: TableConsumer;
  /** Text behind the last line break, as it stands in the file. */
  #tail = '';
  /** Cleaned whole lines that do not make a whole record yet (a quoted cell goes on). */
  #rest = '';
  /** Line on which the next record begins. */
  #line = 1;
  #dialect: Dialect | null = null;
  #parser: Papa.Parser | null = null;
  #headerRead = false;

  constructor(file: string, consumer: TableConsumer) {
    this.#file = file;
    this.#consumer = consumer;
  }

  /** The line the end of the text so far is on. */
  currentLine(): number {
    return this.#line + countLineBreaks(this.#rest) + countLineBreaks(this.#tail);
  }

  parse(text: string, last: boolean): void {
    const nul = text.indexOf('\0');
    if (nul !== -1) {
      const line = this.currentLine() + countLineBreaks(text.slice(0, nul));
      throw this.#error(
        'there is a NUL byte: this is binary data, or UTF-16 without a mark; save it as UTF-8 text',
        line,
      );
    }
    this.#tail += text;
    const end = last ? this.#tail.length : findLinesEnd(this.#tail);
    if (end === 0 && !last) {
      const line = this.#line + countLineBreaks(this.#rest);
      this.#checkLength(
        this.#tail,
        'the line does not end within a million characters; is this a text table?',
        line,
      );
      return;
    }
    let lines = this.#rest + this.#tail.slice(0, end);
    this.#tail = this.#tail.slice(end);
    if (last && lines !== '' && !lines.endsWith('\n')) lines += '\n';
    lines = cleanLines(lines, this.#dialect?.delimiter ?? null);

    if (this.#parser === null) {
      this.#dialect = detectDialect(lines, last);
      if (this.#dialect === null) {
        if (last) throw this.#emptyError();
        this.#rest = lines;
        this.#checkLength(
          lines,
          'no header and first row within a million characters; is this a track table?',
        );
        return;
      }
      this.#parser = new Papa.Parser({ delimiter: this.#dialect.delimiter, newline: '\n' });
    }
    if (this.#headerRead && this.#consumer.readPlainRow !== undefined && !lines.includes('"')) {
      this.#readPlainRows(lines);
      this.#rest = '';
      return;
    }
    const piece = this.#parser.parse(lines, 0, !last) as ParsedPiece;
    this.#readRows(piece, holdsBrokenCells(lines, piece), last);
    this.#rest = last ? '' : lines.slice(piece.meta.cursor);
    this.#checkLength(
      this.#rest,
      'a quote is opened here and not closed within a million characters; close or remove it',
    );
  }

  /** Whole lines without a quote are rows as they stand. */
  #readPlainRows(lines: string): void {
    const delimiter = this.#dialect?.delimiter.charCodeAt(0) ?? 0;
    for (let start = 0; start < lines.length; this.#line++) {
      let end = lines.indexOf('\n', start);
      if (end === -1) end = lines.length;
      if (end > start) this.#consumer.readPlainRow?.(lines, start, end, delimiter, this.#line);
      start = end + 1;
    }
  }

  #readRows(piece: ParsedPiece, broken: boolean, last: boolean): void {
    const { data, errors } = piece;
    // The last error may belong to a record that is still incomplete: it will come again.
    const faulty = errors.length > 0 && (last || errors[0].row < data.length) ? errors[0].row : -1;
    for (let i = 0; i < data.length; i++) {
      const cells = data[i];
      const line = this.#line;
      this.#line++;
      if (i === faulty) {
        throw errors[0].code === 'MissingQuotes'
          ? this.#error('a quote is opened here and never closed; close or remove it', line)
          : this.#error(
              'a closing quote is followed by more text in the same cell; double quotes that belong to the text',
              line,
            );
      }
      if (broken) for (const cell of cells) this.#line += countLineBreaks(cell);
      if (cells.length === 1 && cells[0].trim() === '') continue;
      if (this.#headerRead) this.#consumer.readRow(cells, line);
      else if (this.#dialect !== null) {
        this.#headerRead = true;
        this.#consumer.readHeader(cells, line, this.#dialect);
      }
    }
  }

  #checkLength(text: string, finding: string, line = this.#line): void {
    if (text.length > LONGEST_RECORD) throw this.#error(finding, line);
  }

  #error(finding: string, line: number): Error {
    return tableError({ file: this.#file, line }, finding);
  }

  #emptyError(): Error {
    return tableError(
      { file: this.#file },
      'the file is empty; a header line and one position per row are needed',
    );
  }
}

/** The place behind the last line break that is certainly whole: a CR at the very end may be half of a CRLF. */
function findLinesEnd(text: string): number {
  const feed = text.lastIndexOf('\n');
  if (text.length < 2 || !text.includes('\r')) return feed + 1; // searching forward is much faster than backward
  return Math.max(feed, text.lastIndexOf('\r', text.length - 2)) + 1;
}

/** Whether a record of the piece may take more than one line, because a quoted cell holds line breaks. */
function holdsBrokenCells(lines: string, { data, meta }: ParsedPiece): boolean {
  if (!lines.includes('"')) return false;
  if (lines.includes('\r')) return true;
  let feeds = 0;
  for (
    let place = lines.indexOf('\n');
    place !== -1 && place < meta.cursor;
    place = lines.indexOf('\n', place + 1)
  )
    feeds++;
  return feeds !== data.length;
}

/** Which delimiter a table uses, told from its header and first row. */

import { DELIMITERS, type Delimiter, findClosingQuote } from './cleanLines.js';

export interface Dialect {
  readonly delimiter: Delimiter;
  /** Where commas do not separate cells they may stand for the decimal point. */
  readonly decimalCommas: boolean;
}

/**
 * The delimiter that cuts header and first row into the same number of cells, at least two; among several the first
 * of tab, semicolon, bar, comma (those are rarer inside names and numbers). Where none does, the one that cuts the
 * header into most cells.
 *
 * @param text  cleaned whole lines (see cleanLines) from the start of the table
 * @param complete  whether the text is the whole table
 * @returns null where the text holds no header and first row yet, or the whole table holds no header at all
 */
export function detectDialect(text: string, complete: boolean): Dialect | null {
  const records = findFirstRecords(text);
  if (records.length < (complete ? 1 : 2)) return null;
  let best: Delimiter = ',';
  let mostCells = 1;
  for (const delimiter of DELIMITERS) {
    const cells = countCells(records[0], delimiter);
    if (records.length > 1 && cells > 1 && countCells(records[1], delimiter) === cells) {
      best = delimiter;
      break;
    }
    if (cells > mostCells) [best, mostCells] = [delimiter, cells];
  }
  return { delimiter: best, decimalCommas: best !== ',' };
}

/** The first two records that are not blank; line breaks inside quotes do not end a record. */
function findFirstRecords(text: string): string[] {
  const records: string[] = [];
  let start = 0;
  let cellStart = true;
  for (let place = 0; place < text.length && records.length < 2; place++) {
    const character = text[place];
    if (cellStart && character === '"') {
      place = findClosingQuote(text, place);
      cellStart = false;
    } else if (character === '\n') {
      const record = text.slice(start, place);
      if (record.trim() !== '') records.push(record);
      start = place + 1;
      cellStart = true;
    } else {
      cellStart = isDelimiter(character);
    }
  }
  return records;
}

function isDelimiter(character: string): boolean {
  return (DELIMITERS as readonly string[]).includes(character);
}

function countCells(record: string, delimiter: Delimiter): number {
  let cells = 1;
  let cellStart = true;
  for (let place = 0; place < record.length; place++) {
    if (cellStart && record[place] === '"') {
      place = findClosingQuote(record, place);
      cellStart = false;
    } else {
      if (record[place] === delimiter) cells++;
      cellStart = isDelimiter(record[place]);
    }
  }
  return cells;
}

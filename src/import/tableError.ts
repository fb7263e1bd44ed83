/** The wording of a complaint about a place in a track table: file, line, column, finding, remedy. */

import { DataError, type ErrorFacts } from '../errors.js';

export interface TablePlace {
  /** Name of the file as the caller gave it. */
  readonly file: string;
  /** Line in the file, the first being 1; where a record spans lines, its first. */
  readonly line?: number;
  /** Name of the column as it stands in the header. */
  readonly column?: string;
}

/**
 * A DataError that begins with the place and carries it as facts (`file`, `line`, `column`).
 *
 * @param finding  what was found and what would mend it, e.g. `"abc" is not a number; …`
 */
export function tableError(place: TablePlace, finding: string, facts: ErrorFacts = {}): DataError {
  const { file, line, column } = place;
  const where = `${file}${line === undefined ? '' : ` line ${line}`}${column === undefined ? '' : `, column ${column}`}`;
  return new DataError(`${where}: ${finding}`, {
    file,
    ...(line === undefined ? {} : { line }),
    ...(column === undefined ? {} : { column }),
    ...facts,
  });
}

const LONGEST_QUOTE = 60; // characters of a cell that still read as part of a sentence

/** A cell as it may stand in a sentence: in quotes, control characters escaped, shortened where long. */
export function quoteCell(cell: string): string {
  const characters = Array.from(cell.slice(0, 2 * LONGEST_QUOTE));
  const shown = characters.length > LONGEST_QUOTE ? `${characters.slice(0, LONGEST_QUOTE).join('')}…` : cell;
  return JSON.stringify(shown);
}

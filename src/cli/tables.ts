/** Columns of results to CSV. */

export interface Column {
  readonly name: string;
  /** All columns of a table have the same length. */
  readonly values: ArrayLike<number | string>;
}

const ROWS_PER_PIECE = 4096;

/**
 * The table in pieces of whole lines, header first. Numbers are written with the fewest digits that give the same
 * number again; a value that does not exist is `NaN`. Texts are quoted where they need it.
 */
export function* formatTable(columns: readonly Column[]): Generator<string> {
  let piece = `${columns.map(({ name }) => quoteCell(name)).join(',')}\n`;
  const rows = columns[0]?.values.length ?? 0;
  for (let row = 0; row < rows; row++) {
    for (let i = 0; i < columns.length; i++) {
      const value = columns[i].values[row];
      piece += (i > 0 ? ',' : '') + (typeof value === 'number' ? String(value) : quoteCell(value));
    }
    piece += '\n';
    if (row % ROWS_PER_PIECE === ROWS_PER_PIECE - 1) {
      yield piece;
      piece = '';
    }
  }
  if (piece !== '') yield piece;
}

function quoteCell(text: string): string {
  return /[",;|\t\r\n]|^\s|\s$|^#/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

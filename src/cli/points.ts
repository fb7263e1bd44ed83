/** The table of places that `evaluate --at` reads. */

import { DataError } from '../errors.js';
import { readTable } from '../import/table.js';
import { suggestName } from '../numerics/text/suggestName.js';
import { quoteCell, tableError } from '../import/tableError.js';

/**
 * Reads the columns named like the coordinates; other columns are passed over.
 *
 * @param file  the table's name, for the sentences
 * @returns places, shape (m, d) row-major
 * @throws DataError  a missing column, a cell that is not a finite number, a short row, a table without rows
 */
export async function readPoints(
  file: string,
  chunks: AsyncIterable<Uint8Array>,
  coordinates: readonly string[],
): Promise<Float64Array> {
  const places: number[] = [];
  let columns: number[] = [];
  let names: readonly string[] = [];
  let decimalCommas = false;
  await readTable(
    { name: file, chunks },
    {
      readHeader(cells, line, dialect) {
        names = cells.map((cell) => cell.trim());
        decimalCommas = dialect.decimalCommas;
        columns = coordinates.map((coordinate) => {
          const matches = names.flatMap((name, i) => (name.toLowerCase() === coordinate ? [i] : []));
          if (matches.length === 1) return matches[0];
          const close = suggestName(coordinate, names);
          const hint = close === null ? '' : ` (did you mean ${quoteCell(close)}?)`;
          const found =
            matches.length === 0
              ? `there is no column ${coordinate}${hint}`
              : `column ${coordinate} appears twice`;
          throw tableError(
            { file, line },
            `${found}; the fit needs the columns ${coordinates.join(', ')} (found: ${names.map(quoteCell).join(', ')})`,
          );
        });
      },
      readRow(cells, line) {
        for (let i = 0; i < columns.length; i++) {
          const cell = cells[columns[i]];
          const place = { file, line, column: names[columns[i]] };
          if (cell === undefined) {
            throw tableError(place, `the row has ${cells.length} cells where the header has ${names.length}`);
          }
          const text = decimalCommas ? cell.trim().replace(',', '.') : cell.trim();
          const value = text === '' ? NaN : Number(text);
          if (!Number.isFinite(value)) {
            throw tableError(
              place,
              `${quoteCell(cell)} is not a finite number; correct it or remove the row`,
            );
          }
          places.push(value);
        }
      },
    },
  );
  if (places.length === 0) {
    throw new DataError(`${file} holds no places; below the header each row is one place`, { file });
  }
  return Float64Array.from(places);
}

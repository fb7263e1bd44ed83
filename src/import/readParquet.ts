/**
 * A Parquet file to rows of cells, as if the same table stood in a CSV: `line` counts the header as line 1.
 *
 * Such a file is read from its end, so its bytes are kept in memory; of its rows there is one row group at a time.
 */

import { type FileMetaData, parquetMetadata, parquetRead } from 'hyparquet';
import { compressors } from 'hyparquet-compressors';
import type { TrackSource } from './decodeText.js';
import type { Cell, RowCollector } from './RowCollector.js';
import { tableError } from './tableError.js';

/**
 * Reads a whole source into the collector. Numbers stay numbers; whole numbers of 64 bits, text and anything else are
 * taken as their text; what is missing is an empty cell.
 *
 * @throws DataError  damaged or encrypted data, a compression or encoding that is not known
 */
export async function readParquet(source: TrackSource, collector: RowCollector): Promise<void> {
  const bytes = await gather(source.chunks);
  const file = {
    byteLength: bytes.byteLength,
    slice: (start: number, end?: number) => bytes.slice(start, end),
  };
  const metadata = await guard(source.name, () => Promise.resolve(parquetMetadata(bytes)));
  const names = listColumns(metadata);
  collector.readHeader(names, 1, { delimiter: ',', decimalCommas: false });
  const used = [...new Set(collector.usedColumns())];
  const cells: Cell[] = names.map(() => '');
  let line = 2;
  for (const [start, end] of listGroups(metadata)) {
    const columns = await guard(source.name, () =>
      readGroup(
        file,
        metadata,
        used.map((column) => names[column]),
        start,
        end,
      ),
    );
    for (let row = 0; row < end - start; row++) {
      for (let i = 0; i < used.length; i++) cells[used[i]] = toCell(columns[i][row]);
      collector.readRow(cells, line++);
    }
  }
}

async function gather(chunks: AsyncIterable<Uint8Array>): Promise<ArrayBuffer> {
  const pieces: Uint8Array[] = [];
  for await (const chunk of chunks) pieces.push(chunk);
  const all = new Uint8Array(pieces.reduce((sum, piece) => sum + piece.length, 0));
  let at = 0;
  for (const piece of pieces) {
    all.set(piece, at);
    at += piece.length;
  }
  return all.buffer;
}

/** Names of the columns at the top level; what is nested below one of them is not a number and not looked at. */
function listColumns({ schema }: FileMetaData): string[] {
  const names: string[] = [];
  for (let i = 1; i < schema.length; i++) {
    names.push(schema[i].name);
    for (let children = schema[i].num_children ?? 0; children > 0; children--) {
      i++;
      children += schema[i]?.num_children ?? 0;
    }
  }
  return names;
}

/** The ranges of rows of the row groups. */
function listGroups({ row_groups: groups }: FileMetaData): [number, number][] {
  const ranges: [number, number][] = [];
  let first = 0;
  for (const group of groups) {
    const end = first + Number(group.num_rows);
    ranges.push([first, end]);
    first = end;
  }
  return ranges;
}

/** Columns of a range of rows, in the order of `names`. */
async function readGroup(
  file: { byteLength: number; slice(start: number, end?: number): ArrayBuffer },
  metadata: FileMetaData,
  names: readonly string[],
  start: number,
  end: number,
): Promise<ArrayLike<unknown>[]> {
  const columns: ArrayLike<unknown>[] = names.map(() => []);
  await parquetRead({
    file,
    metadata,
    columns: [...new Set(names)],
    rowStart: start,
    rowEnd: end,
    compressors,
    onChunk: ({ columnName, columnData, rowStart }) => {
      const place = names.indexOf(columnName);
      if (place < 0 || columnData.length === 0) return;
      const at = rowStart - start;
      const column = columns[place];
      if (at === 0 && column.length === 0) columns[place] = columnData as ArrayLike<unknown>;
      else columns[place] = [...Array.from(column), ...Array.from(columnData as ArrayLike<unknown>)];
    },
  });
  return columns;
}

function toCell(value: unknown): Cell {
  if (typeof value === 'number' || typeof value === 'string') return value;
  if (value === null || value === undefined) return '';
  if (typeof value === 'bigint') return value.toString();
  if (value instanceof Date) return value.toISOString();
  return (
    JSON.stringify(value, (_key, part: unknown) => (typeof part === 'bigint' ? String(part) : part)) ?? ''
  );
}

/** Faults of the file in a sentence; complaints about its contents pass as they are. */
async function guard<Result>(file: string, act: () => Promise<Result>): Promise<Result> {
  try {
    return await act();
  } catch (error) {
    const reason = (error instanceof Error ? error.message : String(error)).split('\n')[0];
    throw tableError(
      { file },
      `the Parquet data cannot be read (${reason}); write the file again, or export it as CSV`,
    );
  }
}

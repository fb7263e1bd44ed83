/**
 * Writes every shipped data set: `tracks.csv` and its `datapackage.json`. Run with `npm run datasets`. The same seeds
 * give the same bytes; it uses nothing of the program but its random streams.
 */

import { createHash } from 'node:crypto';
import { mkdirSync, renameSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { DataSet, RecordedPosition } from './DataSet.js';
import { feltTable } from './feltTable.js';
import { settlingBeads } from './settlingBeads.js';
import { stripeCells } from './stripeCells.js';

export const DATA_SETS: readonly DataSet[] = [feltTable, settlingBeads, stripeCells];

/** The whole table as text: comment lines, header, one row per position, each line ended by a newline. */
export function formatTable(set: DataSet, positions: readonly RecordedPosition[]): string {
  const rows = [...positions];
  if (set.rowOrder === 'frames') rows.sort((a, b) => a.frame - b.frame || a.track - b.track);
  const lines = set.comments.map((comment) => `# ${comment}`);
  lines.push(set.columns.map((column) => column.name).join(set.delimiter));
  for (const row of rows) lines.push(set.formatRow(row).join(set.delimiter));
  return `${lines.join('\n')}\n`;
}

/** The Frictionless Data Package descriptor of a table. */
export function describeDataSet(set: DataSet, table: string): Record<string, unknown> {
  const bytes = Buffer.from(table, 'utf8');
  return {
    profile: 'tabular-data-package',
    name: set.name,
    title: set.title,
    description: set.description,
    question: set.question,
    licenses: [
      {
        name: 'CC0-1.0',
        title: 'Creative Commons Zero v1.0 Universal',
        path: 'https://creativecommons.org/publicdomain/zero/1.0/',
      },
    ],
    resources: [
      {
        profile: 'tabular-data-resource',
        name: 'tracks',
        path: 'tracks.csv',
        format: 'csv',
        mediatype: 'text/csv',
        encoding: 'utf-8',
        bytes: bytes.length,
        hash: `sha256:${createHash('sha256').update(bytes).digest('hex')}`,
        rows: table.split('\n').length - 2 - set.comments.length,
        dialect: {
          delimiter: set.delimiter,
          header: true,
          ...(set.comments.length > 0 ? { commentChar: '#' } : {}),
        },
        schema: { fields: set.columns, primaryKey: set.columns.slice(0, 2).map((column) => column.name) },
      },
    ],
    generation: {
      method: `simulated by datasets/generate.ts with ${set.substeps} substeps per frame, each track warmed up before its first frame`,
      seed: set.seed,
      tracks: set.trackCount,
      recording: set.recording,
    },
    wanderlaw: { study: set.study },
    truth: {
      order: set.truth.order,
      ...(set.truth.order === 'first' ? { reading: 'ito' } : {}),
      parameters: set.truth.parameters,
      coefficients: set.truth.coefficients,
    },
  };
}

/** Writes a file whole or not at all. */
function writeWhole(path: string, text: string): void {
  mkdirSync(dirname(path), { recursive: true });
  writeFileSync(`${path}.partial`, text);
  renameSync(`${path}.partial`, path);
}

function generateAll(): void {
  const root = dirname(fileURLToPath(import.meta.url));
  for (const set of DATA_SETS) {
    const positions: RecordedPosition[] = [];
    for (let track = 1; track <= set.trackCount; track++) positions.push(...set.simulateTrack(track));
    const table = formatTable(set, positions);
    writeWhole(join(root, set.name, 'tracks.csv'), table);
    writeWhole(
      join(root, set.name, 'datapackage.json'),
      `${JSON.stringify(describeDataSet(set, table), null, 2)}\n`,
    );
    console.log(`${set.name}: ${positions.length} positions, ${Math.round(table.length / 1024)} KiB`);
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) generateAll();

/** Lines and tables that keep within a width, measured in columns of the terminal (wide letters and emoji take two). */

import Table from 'cli-table3';
import stringWidth from 'string-width';
import type { SummaryStyle } from './SummaryStyle.js';

const INDENT = '  ';
const GAP = 2;

const graphemes = new Intl.Segmenter('en', { granularity: 'grapheme' });

/** The longest beginning of a text that is at most `width` wide. */
function takeWidth(text: string, width: number): string {
  let taken = '';
  for (const { segment } of graphemes.segment(text)) {
    if (stringWidth(taken + segment) > width) break;
    taken += segment;
  }
  return taken;
}

/** Breaks a text into lines of at most `width` columns, between words where it can. */
export function wrapText(text: string, width: number): string[] {
  const lines: string[] = [];
  let line = '';
  for (let word of text.split(/[ \n]+/)) {
    if (line !== '' && stringWidth(`${line} ${word}`) > width) {
      lines.push(line);
      line = '';
    }
    while (line === '' && stringWidth(word) > width) {
      const piece = takeWidth(word, width) || word;
      lines.push(piece);
      word = word.slice(piece.length);
    }
    line = line === '' ? word : `${line} ${word}`;
  }
  return line === '' && lines.length > 0 ? lines : [...lines, line];
}

/** A paragraph, indented by two columns, each line painted by itself. */
export function writeParagraph(text: string, width: number, paint: (line: string) => string): string {
  return wrapText(text, width - INDENT.length)
    .map((line) => `${INDENT}${paint(line)}\n`)
    .join('');
}

/** The heading of a summary. */
export function writeTitle(text: string, { width, colors }: SummaryStyle): string {
  return wrapText(text, width)
    .map((line) => `${colors.bold(line)}\n`)
    .join('');
}

/** Names with their values, which are broken into lines rather than cut. */
export function writeFacts(
  facts: readonly (readonly [name: string, value: string])[],
  width: number,
): string {
  const label = Math.min(Math.max(...facts.map(([name]) => stringWidth(name))), Math.floor(width / 2));
  const room = width - INDENT.length - label - GAP;
  return facts
    .flatMap(([name, value]) => {
      const names = wrapText(name, label);
      const values = wrapText(value, room);
      return Array.from({ length: Math.max(names.length, values.length) }, (_, i) => {
        const text = names[i] ?? '';
        const gap = ' '.repeat(label - stringWidth(text) + GAP);
        return `${`${INDENT}${text}${gap}${values[i] ?? ''}`.trimEnd()}\n`;
      });
    })
    .join('');
}

function measureColumns(rows: readonly (readonly string[])[]): number[] {
  const widths: number[] = [];
  for (const row of rows) {
    row.forEach((cell, i) => {
      widths[i] = Math.max(widths[i] ?? 0, stringWidth(cell));
    });
  }
  return widths;
}

const totalWidth = (widths: readonly number[]) =>
  INDENT.length + widths.reduce((sum, width) => sum + width + GAP, 0) - GAP;

export interface TableShape {
  readonly width: number;
  /** Number of the first column that is aligned to the right; default 1. */
  readonly rightFrom?: number;
  /** Columns that may be left out, from the right, before others are cut; default 0. */
  readonly spare?: number;
}

/** A table with few lines and without colours of its own, never wider than it may be; it ends in a line feed. */
export function drawTable(
  head: readonly string[],
  rows: readonly (readonly string[])[],
  shape: TableShape,
): string {
  const { width, rightFrom = 1 } = shape;
  if (rows.length === 0) return '';
  let spare = shape.spare ?? 0;
  let columns = rows[0]?.length ?? 0;
  const all = head.length > 0 ? [head, ...rows] : rows;
  const widths = measureColumns(all);
  for (; spare > 0 && totalWidth(widths.slice(0, columns)) > width; spare--) columns--;
  const kept = widths.slice(0, columns);
  // What is still too wide is cut, the widest column first.
  while (totalWidth(kept) > width) {
    const widest = kept.indexOf(Math.max(...kept));
    if ((kept[widest] ?? 0) <= 4) break;
    kept[widest] = (kept[widest] ?? 0) - 1;
  }
  const table = new Table({
    head: head.slice(0, columns),
    colWidths: kept.map((size) => size + GAP),
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': GAP },
    colAligns: kept.map((_, i) => (i >= rightFrom ? 'right' : 'left')),
    chars: Object.fromEntries(
      [
        'top|top-mid|top-left|top-right|bottom|bottom-mid|bottom-left|bottom-right',
        'left-mid|mid|mid-mid|right|right-mid|middle',
      ]
        .join('|')
        .split('|')
        .map((place) => [place, ''])
        .concat([['left', INDENT]]),
    ),
  });
  for (const row of rows) table.push(row.slice(0, columns));
  return table
    .toString()
    .split('\n')
    .map((line) => `${line.trimEnd()}\n`)
    .join('');
}

/** Summaries for people at a terminal: plain text, no more than the given width, colours as handed in. */

import Table from 'cli-table3';
import type { ResimulationResult } from '../checks/ResimulationResult.js';
import type { FitDocument } from '../documents/FitDocument.js';
import { evaluateFit } from '../uncertainty/evaluateFit.js';
import { formatUnit, type Units } from '../units.js';
import { drawSparkline } from './charts/sparkline.js';
import {
  formatCount,
  formatInterval,
  formatNumber,
  formatP,
  formatPercent,
  formatQuantity,
  formatWithError,
  parseColumnName,
  tameUnits,
} from './format.js';
import { tameText } from './html.js';
import { listQuantities, nameComponent } from './sections/coefficientParts.js';
import { summarizePrecision } from './sections/precision.js';
import { sayVerdict } from './sections/resimulation.js';
import {
  cellCentre,
  countVisited,
  findMiddle,
  gatherVisitedPlaces,
  layLine,
} from './sections/visitedGrid.js';
import { isFacts, readNumber, readNumbers, readText, readWarnings } from './surveyFacts.js';

type Paint = (text: string) => string;

export interface SummaryStyle {
  /** Columns of the terminal. */
  readonly width: number;
  readonly colors: { readonly bold: Paint; readonly dim: Paint; readonly red: Paint; readonly green: Paint };
}

const plain: Paint = (text) => text;
export const PLAIN_STYLE: SummaryStyle = {
  width: 100,
  colors: { bold: plain, dim: plain, red: plain, green: plain },
};

/** A table without colours of its own and with few lines. */
function drawTable(head: readonly string[], rows: readonly (readonly string[])[], rightFrom = 1): string {
  const table = new Table({
    head: [...head],
    style: { head: [], border: [], 'padding-left': 0, 'padding-right': 2 },
    colAligns: Array.from({ length: rows[0]?.length ?? head.length }, (_, i) =>
      i >= rightFrom ? 'right' : 'left',
    ),
    chars: {
      top: '',
      'top-mid': '',
      'top-left': '',
      'top-right': '',
      bottom: '',
      'bottom-mid': '',
      'bottom-left': '',
      'bottom-right': '',
      left: '  ',
      'left-mid': '',
      mid: '',
      'mid-mid': '',
      right: '',
      'right-mid': '',
      middle: '',
    },
  });
  for (const row of rows) table.push([...row]);
  return table
    .toString()
    .split('\n')
    .map((line) => line.trimEnd())
    .join('\n');
}

/** Breaks a sentence into lines of at most `width` characters. */
function wrapText(text: string, width: number): string {
  const lines: string[] = [];
  let line = '';
  for (const word of text.split(' ')) {
    if (line !== '' && line.length + word.length + 1 > width) {
      lines.push(line);
      line = word;
    } else {
      line = line === '' ? word : `${line} ${word}`;
    }
  }
  return [...lines, line].join('\n');
}

function readUnits(facts: Readonly<Record<string, unknown>>): Units {
  const units = isFacts(facts.units) ? facts.units : {};
  return tameUnits({ length: readText(units, 'length'), time: readText(units, 'time') });
}

/**
 * What was recorded, as a table of names and values.
 *
 * @param survey  what `survey --json` prints
 */
export function formatSurveySummary(survey: object, style: SummaryStyle = PLAIN_STYLE): string {
  const facts = survey as Readonly<Record<string, unknown>>;
  const units = readUnits(facts);
  const number = (name: string, show: (value: number) => string): [string, string][] => {
    const value = readNumber(facts, name);
    return value === null ? [] : [[spellOut(name), show(value)]];
  };
  const relaxation = readNumber(facts, 'relaxationTime');
  const errors = readNumbers(facts, 'localizationError');
  const order = readText(facts, 'recommendedOrder');
  const warnings = readWarnings(facts).length;
  const rows: [string, string][] = [
    ...number('tracks', formatCount),
    ...number('positions', formatCount),
    ...number('dimensions', formatCount),
    ...number('interval', (value) => formatQuantity(value, 'time', units, 4)),
    ...number('missingFrames', formatCount),
    ...(errors.length > 0
      ? [
          [
            'localization error',
            errors.map((error) => formatQuantity(error, 'position', units)).join(', '),
          ] as [string, string],
        ]
      : []),
    ['relaxation time', relaxation === null ? 'not resolved' : formatQuantity(relaxation, 'time', units)],
    ...(order === null ? [] : [['recommended order', order] as [string, string]]),
    ['warnings', warnings === 0 ? 'none' : formatCount(warnings)],
  ];
  return `${style.colors.bold('What was recorded')}\n${drawTable([], rows)}\n`;
}

const spellOut = (name: string) =>
  name.replace(/([a-z])([A-Z])/g, (_, a: string, b: string) => `${a} ${b.toLowerCase()}`);

/** The coefficients in the middle of the visited region, their range over it, and their course along each axis. */
export function formatFitSummary(fit: FitDocument, style: SummaryStyle = PLAIN_STYLE): string {
  const { bold, dim } = style.colors;
  const region = fit.visited;
  const units = tameUnits(fit.data.units);
  const coordinates = fit.data.coordinates.map((name) => tameText(name, 16));
  const middle = Float64Array.from(findMiddle(region), (number, axis) => cellCentre(region, axis, number));
  const atMiddle = evaluateFit(fit, middle).columns;
  const places = gatherVisitedPlaces(region);
  const everywhere = evaluateFit(fit, places);
  const span = fit.data.dimensions === 1 ? 32 : 16;
  const lines = coordinates.map((_, axis) => evaluateFit(fit, layLine(region, axis, span).places));
  const rows = listQuantities(fit.model, atMiddle).flatMap((part) =>
    part.components.map((component) => {
      const isColumn = (column: { name: string }) => column.name === component.column;
      const here = atMiddle.find(isColumn);
      const all = everywhere.columns.find(isColumn);
      const summary = all && summarizePrecision(all, everywhere.columns, everywhere.visited);
      const unit = formatUnit(part.quantity, units);
      const interval = here
        ? formatInterval(here.values[0] ?? NaN, here.low[0] ?? NaN, here.high[0] ?? NaN)
        : '';
      const range = summary
        ? `${formatNumber(summary.low)} … ${formatNumber(summary.high)}`
        : 'nowhere visited';
      const courses = lines.map((line) =>
        drawSparkline(line.columns.find(isColumn)?.values ?? [], line.visited),
      );
      return [nameComponent(part, component), unit, interval, range, ...courses];
    }),
  );
  const at = coordinates
    .map((name, axis) => `${name} = ${formatQuantity(middle[axis] ?? 0, 'position', units)}`)
    .join(', ');
  const heads = [
    'coefficient',
    'unit',
    'in the middle',
    'over the region',
    ...coordinates.map((name) => `along ${name}`),
  ];
  // Narrow terminals lose the courses first.
  const fits = (count: number) =>
    drawTable(
      heads.slice(0, count),
      rows.map((row) => row.slice(0, count)),
      2,
    )
      .split('\n')
      .every((line) => [...line].length <= style.width);
  let columns = heads.length;
  while (columns > 3 && !fits(columns)) columns--;
  const reading = fit.model.order === 'first' ? ', drift in the Itô reading' : '';
  const title = bold(`Model of ${fit.model.order} order${reading}`);
  const explained = wrapText(
    `Middle: ${at}. Intervals: ${formatPercent(fit.uncertainty.confidence)}, from ${formatCount(fit.uncertainty.blocks)} independent pieces. Visited: ${formatCount(countVisited(region))} of ${formatCount(region.counts.length)} cells.`,
    style.width - 2,
  );
  const errors = fit.localizationError.map(
    (error, axis) => `${coordinates[axis] ?? ''} ${formatInterval(error.value, error.low, error.high)}`,
  );
  const unit = formatUnit('position', units);
  const localization = wrapText(
    `Localization error: ${errors.join(', ')}${unit === '' ? '' : ` ${unit}`}.`,
    style.width - 2,
  );
  const indent = (text: string) =>
    text
      .split('\n')
      .map((line) => `  ${dim(line)}`)
      .join('\n');
  return `${title}\n${drawTable(
    heads.slice(0, columns),
    rows.map((row) => row.slice(0, columns)),
    2,
  )}\n${indent(explained)}\n${indent(localization)}\n`;
}

/** The verdict, every statistic with its p-value, and how far the refitted coefficients are from the ones put in. */
export function formatResimulationSummary(
  result: ResimulationResult,
  style: SummaryStyle = PLAIN_STYLE,
): string {
  const { bold, green, red } = style.colors;
  const rows = result.statistics.map((statistic) => [
    tameText(statistic.title, Math.max(20, style.width - 52)),
    formatNumber(statistic.recorded),
    `${formatNumber(statistic.low)} … ${formatNumber(statistic.high)}`,
    formatP(statistic.adjusted),
  ]);
  const table = drawTable(['statistic', 'recorded', 'simulated, 95 %', 'p, corrected'], rows);
  const verdict = wrapText(sayVerdict(result), style.width - 2)
    .split('\n')
    .map((line) => `  ${(result.consistent ? green : red)(line)}`)
    .join('\n');
  return `${bold(`Recording against ${formatCount(result.replicates)} simulated ones`)}\n${table}\n${verdict}\n${formatRefit(result)}`;
}

/** Refitted coefficients field by field: how many are off, and the worst. */
function formatRefit(result: ResimulationResult): string {
  const fields = new Map<
    string,
    { count: number; off: number; worst: ResimulationResult['refit'][number]; ratio: number }
  >();
  for (const row of result.refit) {
    if (row.standardError === null || row.standardError <= 0) continue;
    const ratio = Math.abs(row.refitted - row.putIn) / row.standardError;
    const name = row.name.replace(/\[.*$/, '');
    const entry = fields.get(name) ?? { count: 0, off: 0, worst: row, ratio: 0 };
    entry.count++;
    if (ratio > 3) entry.off++;
    if (ratio >= entry.ratio) Object.assign(entry, { worst: row, ratio });
    fields.set(name, entry);
  }
  if (fields.size === 0) return '';
  const rows = [...fields].map(([name, entry]) => [
    parseColumnName(name) ? name : tameText(name, 40),
    formatCount(entry.count),
    formatCount(entry.off),
    formatNumber(entry.worst.putIn),
    formatWithError(entry.worst.refitted, entry.worst.standardError ?? 0),
  ]);
  return `${drawTable(['put in and got back', 'numbers', 'off by > 3 errors', 'worst: put in', 'got back'], rows)}\n`;
}

/** The recording against its re-simulation, for people at a terminal. */

import type {
  RefitCoefficient,
  ResimulationResult,
  ResimulationTime,
} from '../../checks/ResimulationResult.js';
import { drawGaugeLine } from '../charts/gaugeLine.js';
import {
  formatCount,
  formatNumber,
  formatP,
  formatRange,
  formatWithError,
  parseColumnName,
} from '../format.js';
import { tameText } from '../html.js';
import { sayVerdict } from '../sections/resimulation.js';
import { drawTable, writeParagraph, writeTitle } from './layout.js';
import { PLAIN_STYLE, type SummaryStyle } from './SummaryStyle.js';

/** Columns of the picture of a recorded value among the simulated ones. */
const GAUGE_WIDTH = 15;

/** The verdict, every statistic with its p-value, and how far the refitted coefficients are from the ones put in. */
export function formatResimulationSummary(
  result: ResimulationResult,
  style: SummaryStyle = PLAIN_STYLE,
): string {
  const { green, red } = style.colors;
  const { width } = style;
  const rows = result.statistics.map(({ title, adjusted, recorded, low, high }) => [
    tameText(title, 60),
    formatP(adjusted),
    drawGaugeLine(recorded, low, high, GAUGE_WIDTH),
    formatNumber(recorded),
    formatRange(low, high, 3, ' … '),
  ]);
  const heads = ['statistic', 'p, corrected', 'among simulated', 'recorded', 'simulated, 95 %'];
  const verdict = writeParagraph(sayVerdict(result), width, result.consistent ? green : red);
  return `${writeTitle(`Recording against ${formatCount(result.replicates)} simulated ones`, style)}${drawTable(heads, rows, { width, spare: 2 })}${verdict}${formatTimes(result.times, width)}${formatRefit(result.refit, width)}`;
}

/** Mean residence and first-passage times beside the simulated ones. */
function formatTimes(times: readonly ResimulationTime[], width: number): string {
  const show = (value: number | null): string => (value === null ? 'not seen' : formatNumber(value));
  const rows = times.map(({ name, recorded, events, low, median, high }) => [
    tameText(name.replace(':', ' '), 50),
    formatCount(events),
    show(recorded),
    show(median),
    `${show(low)} … ${show(high)}`,
  ]);
  if (rows.length === 0) return '';
  return drawTable(['mean time', 'ends seen', 'recorded', 'simulated', 'simulated, 95 %'], rows, {
    width,
    spare: 0,
  });
}

/** Refitted coefficients field by field: how many are off, and the worst. */
function formatRefit(refit: readonly RefitCoefficient[], width: number): string {
  const fields = new Map<string, { count: number; off: number; worst: RefitCoefficient; ratio: number }>();
  for (const row of refit) {
    if (row.standardError === null || row.standardError <= 0) continue;
    const ratio = Math.abs(row.refitted - row.putIn) / row.standardError;
    const name = row.name.replace(/\[.*$/, '');
    const entry = fields.get(name) ?? { count: 0, off: 0, worst: row, ratio: 0 };
    entry.count++;
    if (ratio > 3) entry.off++;
    if (ratio >= entry.ratio) Object.assign(entry, { worst: row, ratio });
    fields.set(name, entry);
  }
  const rows = [...fields].map(([name, { count, off, worst }]) => [
    parseColumnName(name) ? name : tameText(name, 40),
    formatCount(count),
    formatCount(off),
    formatNumber(worst.putIn),
    formatWithError(worst.refitted, worst.standardError ?? 0),
  ]);
  return drawTable(
    ['put in and got back', 'numbers', 'off by > 3 errors', 'worst: put in', 'got back'],
    rows,
    {
      width,
      spare: 2,
    },
  );
}

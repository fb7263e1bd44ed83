/** What was recorded, for people at a terminal. */

import type { Units } from '../../units.js';
import { drawSparkline } from '../charts/sparkline.js';
import {
  formatCount,
  formatInterval,
  formatNumber,
  formatPercent,
  formatQuantity,
  formatSetting,
  joinUnit,
  tameUnits,
} from '../format.js';
import { tameText } from '../html.js';
import { readDisplacementMemory } from '../sections/memoryFigure.js';
import { isFacts, readNumber, readNumbers, readText, readWarnings } from '../surveyFacts.js';
import { writeFacts, writeParagraph, writeTitle } from './layout.js';
import { PLAIN_STYLE, type SummaryStyle } from './SummaryStyle.js';

type Facts = Readonly<Record<string, unknown>>;
const MEMORY_NAME = 'displacements remember';

type Row = readonly [name: string, value: string];

function readUnits(facts: Facts): Units {
  const units = isFacts(facts.units) ? facts.units : {};
  return tameUnits({ length: readText(units, 'length'), time: readText(units, 'time') });
}

function readCoordinates(facts: Facts): string[] {
  const names = Array.isArray(facts.coordinates) ? (facts.coordinates as unknown[]) : [];
  return names.filter((name) => typeof name === 'string').map((name) => tameText(name, 16));
}

function countRow(facts: Facts, name: string, label: string): Row[] {
  const value = readNumber(facts, name);
  return value === null ? [] : [[label, formatCount(value)]];
}

function describeTracks(facts: Facts): Row[] {
  const tracks = readNumber(facts, 'tracks');
  if (tracks === null) return [];
  const lengths = isFacts(facts.trackLengths) ? facts.trackLengths : {};
  const [least, most] = [readNumber(lengths, 'least'), readNumber(lengths, 'most')];
  const range =
    least === null || most === null
      ? ''
      : least === most
        ? ` of ${formatCount(least)} positions`
        : ` of ${formatCount(least)} to ${formatCount(most)} positions`;
  return [['tracks', `${formatCount(tracks)}${range}`]];
}

function describeVisited(facts: Facts): Row[] {
  const visited = isFacts(facts.visited) ? facts.visited : {};
  const [cells, seen] = [readNumber(visited, 'cells'), readNumber(visited, 'visitedCells')];
  return cells === null || seen === null
    ? []
    : [['visited', `${formatCount(seen)} of ${formatCount(cells)} cells`]];
}

function describeRelaxation(facts: Facts, units: Units): Row {
  const relaxation = readNumber(facts, 'relaxationTime');
  if (relaxation === null) return ['relaxation time', 'not resolved'];
  const interval = isFacts(facts.relaxationTimeInterval) ? facts.relaxationTimeInterval : {};
  const [low, high] = ['low', 'high'].map((name) => readNumber(interval, name) ?? Number.NaN);
  const frames = readNumber(facts, 'interval');
  const said = joinUnit(formatInterval(relaxation, low ?? NaN, high ?? NaN), 'time', units);
  return [
    'relaxation time',
    frames === null ? said : `${said}, ${formatNumber(relaxation / frames, 2)} intervals`,
  ];
}

function describePrecision(facts: Facts): Row[] {
  const bound = facts.expectedPrecision;
  if (!isFacts(bound)) return [];
  const [friction, noise] = [readNumber(bound, 'friction'), readNumber(bound, 'noise')];
  if (friction === null || noise === null) return [];
  return [['precision at best', `friction ±${formatPercent(friction)}, noise ±${formatPercent(noise)}`]];
}

/** A line per axis: how the correlation of displacements falls with the time between them. */
function drawMemory(facts: Facts, coordinates: readonly string[], width: number): Row[] {
  const memory = readDisplacementMemory(facts);
  if (memory === null) return [];
  // Beside the name of the row and the numbers at both ends.
  const room = Math.max(6, width - MEMORY_NAME.length - 22);
  return memory.correlations.map((all, axis): Row => {
    const values = all.slice(0, room);
    const line = drawSparkline(
      values,
      values.map(() => 1),
    );
    const [first = NaN, last = NaN] = [values[0], values[values.length - 1]];
    return [
      axis === 0 ? MEMORY_NAME : '',
      `${coordinates[axis] ?? ''} ${formatNumber(first, 2)} ${line} ${formatNumber(last, 2)}`.replaceAll(
        ' ',
        '\u00a0',
      ),
    ];
  });
}

/**
 * What was recorded, as a table of names and values.
 *
 * @param survey  what `survey --json` prints
 */
export function formatSurveySummary(survey: object, style: SummaryStyle = PLAIN_STYLE): string {
  const facts = survey as Facts;
  const units = readUnits(facts);
  const coordinates = readCoordinates(facts);
  const interval = readNumber(facts, 'interval');
  const errors = readNumbers(facts, 'localizationError');
  const order = readText(facts, 'recommendedOrder');
  const warnings = readWarnings(facts).length;
  const localization = errors.map((error, axis) =>
    `${coordinates[axis] ?? ''} ${formatQuantity(error, 'position', units)}`.trim(),
  );
  const memory = readDisplacementMemory(facts);
  const rows: Row[] = [
    ...describeTracks(facts),
    ...countRow(facts, 'positions', 'positions'),
    ...countRow(facts, 'dimensions', 'dimensions'),
    ...(interval === null ? [] : [['interval', joinUnit(formatSetting(interval), 'time', units)] as const]),
    ...countRow(facts, 'missingFrames', 'missing frames'),
    ...describeVisited(facts),
    ...(errors.length > 0 ? [['localization error', localization.join(', ')] as const] : []),
    describeRelaxation(facts, units),
    ...drawMemory(facts, coordinates, style.width),
    ...describePrecision(facts),
    ...(order === null ? [] : [['recommended order', tameText(order, 20)] as const]),
    ['warnings', warnings === 0 ? 'none' : formatCount(warnings)],
  ];
  const explained =
    memory === null
      ? ''
      : writeParagraph(
          'Displacements remember: their correlation from one interval apart onwards.',
          style.width,
          style.colors.dim,
        );
  return `${writeTitle('What was recorded', style)}${writeFacts(rows, style.width)}${explained}`;
}

/** `evaluate FIT --at POINTS`: the coefficients with their intervals at given places. */

import { evaluateFit } from '../../uncertainty/evaluateFit.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readPoints } from '../points.js';
import { openInput } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';
import { type Column, formatTable } from '../tables.js';

/** @throws UsageError, DataError */
export async function runEvaluate({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const at = options.at as string;
  checkResultPlace(options.output, [fitPath, at], terminal);
  const fit = await readFit(fitPath, terminal);
  const { coordinates, dimensions } = fit.data;
  const places = await readPoints(at, openInput(at, terminal), coordinates);
  const { columns, visited } = evaluateFit(fit, places);

  const table: Column[] = coordinates.map((name, axis) => ({
    name,
    values: places.filter((_, i) => i % dimensions === axis),
  }));
  for (const { name, values, low, high, bandLow, bandHigh } of columns) {
    table.push({ name, values });
    table.push({ name: `${name}_low`, values: options.simultaneous ? bandLow : low });
    table.push({ name: `${name}_high`, values: options.simultaneous ? bandHigh : high });
  }
  table.push({ name: 'visited', values: visited });

  const points = (): unknown[] =>
    Array.from(visited, (_, row) => Object.fromEntries(table.map(({ name, values }) => [name, values[row]])));
  const text = wantsJson(options)
    ? formatJson({ confidence: fit.uncertainty.confidence, points: points() })
    : [...formatTable(table)].join('');
  const outside = visited.filter((flag) => flag === 0).length;
  if (outside > 0) {
    const share = `${outside} of ${visited.length} places lie`;
    terminal.warn({
      code: 'outside-visited',
      message: `${share} outside the visited region, where the coefficients are only continued from its edge`,
    });
  }
  await deliver(text, options.output, terminal);
}

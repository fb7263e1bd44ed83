/** `evaluate FIT --at POINTS`: the coefficients with their intervals at given places. */

import { evaluateFit } from '../../uncertainty/evaluateFit.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readPoints } from '../points.js';
import { openInput } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';

/** @throws UsageError, DataError */
export async function runEvaluate({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const at = options.at as string;
  checkResultPlace(options.output, [fitPath, at], terminal);
  const fit = await readFit(fitPath, terminal);
  const { coordinates, dimensions } = fit.data;
  const places = await readPoints(at, openInput(at, terminal), coordinates);
  const { columns, visited } = evaluateFit(fit, places);

  const named: [string, ArrayLike<number>][] = coordinates.map((coordinate, axis) => [
    coordinate,
    places.filter((_, i) => i % dimensions === axis),
  ]);
  for (const column of columns) {
    named.push([column.name, column.values]);
    named.push([`${column.name}_low`, options.simultaneous ? column.bandLow : column.low]);
    named.push([`${column.name}_high`, options.simultaneous ? column.bandHigh : column.high]);
  }
  named.push(['visited', visited]);

  const rows = Array.from(visited, (_, row) => named.map(([name, values]) => [name, values[row]] as const));
  const text = wantsJson(options)
    ? formatJson({
        confidence: fit.uncertainty.confidence,
        points: rows.map((row) => Object.fromEntries(row)),
      })
    : [named.map(([name]) => name), ...rows.map((row) => row.map(([, value]) => value))]
        .map((cells) => `${cells.join(',')}\n`)
        .join('');
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

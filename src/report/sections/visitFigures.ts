/** Pictures of where the recording was: positions per cell along one axis, or over a plane. */

import { drawMap, spreadColours } from '../charts/mapChart.js';
import { steppedClasses } from '../charts/ticks.js';
import { drawVisits } from '../charts/visitChart.js';
import { drawFigure } from '../figure.js';
import { formatCount, formatNumber, formatPowerOfTen, formatQuantity } from '../format.js';
import { type Html, html } from '../html.js';
import type { LegendPart } from '../legend.js';
import { labelPosition, NARROW_WIDTH, type PageContext, tabulatePlaces } from './Section.js';
import { drawBoth } from './trackFigures.js';
import { layPlane, sumAlongAxis } from './visitedGrid.js';

function drawAlong(context: PageContext, axis: number): Html {
  const { fit, drawing, units, coordinates } = context;
  const isOnly = fit.data.dimensions === 1;
  const counts = sumAlongAxis(fit.visited, axis);
  const threshold = isOnly ? fit.visited.threshold : 1;
  const [low, high] = [fit.visited.low[axis] ?? 0, fit.visited.high[axis] ?? 1];
  const edge = (i: number) => low + ((high - low) * i) / counts.length;
  const name = coordinates[axis] ?? '';
  const draw = (width: number) =>
    drawVisits(
      drawing,
      { low, high, counts, threshold },
      {
        width,
        height: isOnly ? 300 : 200,
        xLabel: labelPosition(context, axis),
        yLabel: (exponent) =>
          `positions per ${isOnly ? 'cell' : 'slice'}${exponent === 0 ? '' : ` (${formatPowerOfTen(exponent)})`}`,
        describe: (index) =>
          `${name} from ${formatNumber(edge(index))} to ${formatNumber(edge(index + 1))}: ${formatCount(counts[index] ?? 0)} positions`,
      },
    );
  const legend: LegendPart[] = counts.some((count) => count < threshold)
    ? [{ sample: 'hatched', text: 'not visited' }]
    : [];
  return drawFigure(context.figures, {
    name: `visits ${name}`,
    title: `Where the recording was, along ${name}`,
    note: `${isOnly ? 'Cells' : 'Slices'} of ${formatQuantity((high - low) / counts.length, 'position', units)}.`,
    legend,
    label: `Positions per cell along ${name}`,
    chart: isOnly ? drawBoth(draw) : draw(NARROW_WIDTH),
    table: [
      { name: `${name}_from`, values: counts.map((_, i) => edge(i)) },
      { name: `${name}_to`, values: counts.map((_, i) => edge(i + 1)) },
      { name: 'positions', values: counts },
    ],
  });
}

function drawOverPlane(context: PageContext): Html {
  const { drawing, units, coordinates } = context;
  const { grid, places, counts } = layPlane(context.fit.visited, 0, 1);
  const edges = steppedClasses(Math.max(1, ...counts), 7);
  const colours = spreadColours(edges.length - 1);
  const classOf = (i: number) =>
    Math.max(0, edges.findIndex((edge, k) => k > 0 && (counts[i] ?? 0) <= edge) - 1);
  const describe = (i: number) => {
    const at = [0, 1].map((axis) => `${coordinates[axis]} = ${formatNumber(places[2 * i + axis] ?? 0)}`);
    return `Cell at ${at.join(', ')}: ${formatCount(counts[i] ?? 0)} positions`;
  };
  const size = [0, 1].map((axis) =>
    formatQuantity(
      ((grid.high[axis] ?? 1) - (grid.low[axis] ?? 0)) / (grid.cells[axis] ?? 1),
      'position',
      units,
    ),
  );
  const legend: LegendPart[] = [{ edges, colours }];
  if (Array.from(grid.visited).includes(0)) legend.push({ sample: 'hatched', text: 'not visited' });
  return drawFigure(context.figures, {
    name: 'visits',
    title: 'Where the recording was',
    note: `Positions per cell of ${size.join(' by ')}.`,
    legend,
    label: 'Map of the number of positions per cell',
    chart: drawBoth((width) =>
      drawMap(drawing, grid, {
        width,
        xLabel: labelPosition(context, 0),
        yLabel: labelPosition(context, 1),
        colours,
        classOf,
        describe,
      }),
    ),
    table: [
      ...tabulatePlaces(context, places),
      { name: 'positions', values: counts },
      { name: 'visited', values: grid.visited },
    ],
  });
}

/** A map in two dimensions; bars along each axis in one or three. */
export function drawVisitFigures(context: PageContext): Html {
  if (context.fit.data.dimensions === 2) return drawOverPlane(context);
  return html`${context.coordinates.map((_, axis) => drawAlong(context, axis))}`;
}

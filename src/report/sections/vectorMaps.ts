/** Force and drift over planes: arrows, how well they are known, and the components along their own axes. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import { drawArrows } from '../charts/arrowChart.js';
import { drawFigure } from '../figure.js';
import { formatQuantity } from '../format.js';
import { type Html, html } from '../html.js';
import { chooseSectionHeight, layBeside } from './coefficientMaps.js';
import { describeValue, drawComponentCurves } from './coefficientCurves.js';
import type { QuantityPart } from './coefficientParts.js';
import { describeCell, drawErrorMap } from './planeMaps.js';
import { halfWidth } from './precision.js';
import {
  capitalize,
  describeElsewhere,
  evaluatePlane,
  labelPosition,
  listPlanes,
  NARROW_WIDTH,
  type PageContext,
  tabulatePlaces,
} from './Section.js';

/** Half-width of a vector's interval against its largest length on the plane. */
function createVectorError(columns: readonly EvaluatedColumn[], visited: ArrayLike<number>) {
  const length = (i: number) => Math.hypot(...columns.map((column) => column.values[i] ?? 0));
  const half = (i: number) => Math.hypot(...columns.map((column) => halfWidth(column, i)));
  let largest = 0;
  for (let i = 0; i < visited.length; i++) if (visited[i] === 1) largest = Math.max(largest, length(i));
  return (i: number) => half(i) / (largest || 1);
}

const containsZero = (column: EvaluatedColumn, i: number) =>
  (column.low[i] ?? 0) <= 0 && (column.high[i] ?? 0) >= 0;

function drawPlane(context: PageContext, part: QuantityPart, axes: [number, number]) {
  const { units, drawing, coordinates } = context;
  const name = part.quantity;
  const plane = evaluatePlane(context, ...axes);
  const [along, across] = axes.map((axis) => plane.byName.get(part.components[axis]?.column ?? ''));
  if (!along || !across) return { arrows: html``, error: html`` };
  const chart = drawArrows(drawing, plane.grid, {
    width: NARROW_WIDTH,
    xLabel: labelPosition(context, axes[0]),
    yLabel: labelPosition(context, axes[1]),
    along: along.values,
    across: across.values,
    distinct: (i) => !(containsZero(along, i) && containsZero(across, i)),
    formatLength: (length) => formatQuantity(length, part.quantity, units, 1),
    describe: (i) =>
      `${describeCell(context, plane, i)}: along ${coordinates[axes[0]]} ${describeValue(context, part, along, i)}, along ${coordinates[axes[1]]} ${describeValue(context, part, across, i)}`,
  });
  const elsewhere = describeElsewhere(context, axes);
  const columns = [along, across].flatMap((column) => [
    { name: column.name, values: column.values },
    { name: `${column.name}_low`, values: column.low },
    { name: `${column.name}_high`, values: column.high },
  ]);
  const pair = axes.map((axis) => coordinates[axis]);
  const arrows = drawFigure(context.figures, {
    name: `${name} arrows ${pair.join('')}`,
    title: capitalize(name),
    note: elsewhere === '' ? 'Length to the scale above the picture.' : `${capitalize(elsewhere)}.`,
    legend: [
      { sample: 'arrow', text: 'told from zero' },
      { sample: 'faint', text: 'could be zero' },
      ...(Array.from(plane.grid.visited).includes(0)
        ? [{ sample: 'hatched', text: 'not visited' } as const]
        : []),
    ],
    label: `Arrows of ${name} over ${pair.join(' and ')}`,
    chart,
    table: [
      ...tabulatePlaces(context, plane.places),
      ...columns,
      { name: 'visited', values: plane.grid.visited },
    ],
  });
  const error =
    context.fit.data.dimensions === 2
      ? drawErrorMap(
          context,
          { file: name, name, scale: `the largest ${name}` },
          createVectorError([along, across], plane.grid.visited),
          plane,
          axes,
        )
      : html``;
  return { arrows, error };
}

/** Arrows in each plane, how well they are known, and each component along its own axis. */
export function drawVectorMaps(context: PageContext, part: QuantityPart): Html {
  const d = context.fit.data.dimensions;
  const planes = listPlanes(d).map((axes) => drawPlane(context, part, axes));
  const height = chooseSectionHeight(context);
  const sections = part.components.map((component, axis) =>
    drawComponentCurves(context, part, component, [axis], height),
  );
  if (d === 2) {
    return html`${planes.map(({ arrows, error }) => layBeside(html`${arrows}${error}`, html`${sections}`))}`;
  }
  return html`<div class="pictures">${sections}</div><div class="pictures">${planes.map(({ arrows }) => arrows)}</div>`;
}

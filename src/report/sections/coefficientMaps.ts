/** Coefficients over planes: colour maps with a neighbouring map of their error, arrows for vectors. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import { drawArrows } from '../charts/arrowChart.js';
import {
  chooseMapHeight,
  drawClassLegend,
  drawMap,
  spreadColours,
  VALUE_COLOURS,
} from '../charts/mapChart.js';
import { findRange, roundClasses } from '../charts/ticks.js';
import { drawFigure, keyEntry } from '../figure.js';
import { axisExponent, formatAxisLabel, formatNumber, formatPercent, formatQuantity } from '../format.js';
import { Html, html } from '../html.js';
import { drawComponentCurves, describeValue } from './coefficientCurves.js';
import { type Component, nameComponent, type QuantityPart } from './coefficientParts.js';
import { createScale, halfWidth, isPositiveColumn } from './precision.js';
import { evaluatePlane, labelPosition, NARROW_WIDTH, type PageContext } from './Section.js';
import { cellCentre, findMiddle, layPlane, type Plane } from './visitedGrid.js';

const DOUBT_COLOURS = Array.from({ length: 5 }, (_, i) => `var(--doubt-${i})`);
/** Classes of relative error: what a reader wants to know is its order of size. */
const DOUBT_EDGES = [0.05, 0.1, 0.2, 0.5];
/** Cells with a larger relative error are striped: the value is hardly known. */
const STRIPED_FROM = 0.5;

function describeCell(context: PageContext, plane: Plane, index: number): string {
  const d = context.fit.data.dimensions;
  return context.coordinates
    .map((name, axis) => `${name} = ${formatNumber(plane.places[index * d + axis] ?? 0)}`)
    .join(', ');
}

/** Where a plane lies, e.g. `at z = 3 µm`; empty in two dimensions. */
function describePlanePlace(context: PageContext, first: number, second: number): string {
  const third = 3 - first - second;
  if (context.fit.data.dimensions < 3) return '';
  const middle = findMiddle(context.fit.visited)[third] ?? 0;
  const place = formatQuantity(cellCentre(context.fit.visited, third, middle), 'position', context.units);
  return ` at ${context.coordinates[third] ?? ''} = ${place}`;
}

/** Pairs of axes that span the planes to draw. */
function listPlanes(dimensions: number): [number, number][] {
  return dimensions === 2
    ? [[0, 1]]
    : [
        [0, 1],
        [0, 2],
        [1, 2],
      ];
}

function drawValueMap(
  context: PageContext,
  part: QuantityPart,
  component: Component,
  axes: [number, number],
): Html {
  const plane = evaluatePlane(context, ...axes);
  const { byName } = plane;
  const column = byName.get(component.column);
  if (!column) return html``;
  const { grid } = plane;
  const scale = createScale(column, grid.visited);
  const isUncertain = (i: number) => !(halfWidth(column, i) / scale(i) < STRIPED_FROM);
  const visitedCells = Array.from(column.values.keys()).filter((i) => grid.visited[i] === 1);
  const sure = visitedCells.filter((i) => !isUncertain(i));
  // Colours follow the cells where something is known; the others take the end classes.
  const judged = sure.length >= 4 ? sure : visitedCells;
  const exponent = axisExponent(judged.map((i) => column.values[i] ?? 0));
  const value = (i: number) => (column.values[i] ?? Number.NaN) * 10 ** -exponent;
  const range = findRange(judged.map(value)) ?? { low: 0, high: 1 };
  const edges = roundClasses(range.low, range.high, VALUE_COLOURS.length);
  const colours = spreadColours(edges.length - 1);
  const [first, last] = [edges[0] ?? 0, edges[edges.length - 1] ?? 1];
  const name = nameComponent(part, component);
  const chart = drawMap(context.drawing, grid, {
    width: NARROW_WIDTH,
    xLabel: labelPosition(context, axes[0]),
    yLabel: labelPosition(context, axes[1]),
    colours,
    classOf: (i) => {
      if (!Number.isFinite(value(i))) return null;
      const found = edges.findIndex((edge, k) => k > 0 && value(i) < edge);
      return found < 0 ? colours.length - 1 : found - 1;
    },
    uncertain: isUncertain,
    describe: (i) => `${describeCell(context, plane, i)}: ${describeValue(context, part, column, i)}`,
  });
  const open = {
    below: visitedCells.some((i) => value(i) < first - 1e-9),
    above: visitedCells.some((i) => value(i) > last + 1e-9),
  };
  const anyUncertain = sure.length < visitedCells.length;
  return drawFigure({
    title: `${formatAxisLabel(`${name[0]?.toUpperCase()}${name.slice(1)}`, part.quantity, context.units, exponent)}${describePlanePlace(context, ...axes)}`,
    key: html`${new Html(drawClassLegend(edges, colours, open))}${keyEntry('hatched', 'not visited')}${anyUncertain ? keyEntry('veiled', 'error over half the value') : null}`,
    label: `Map of ${name} over ${axes.map((axis) => context.coordinates[axis]).join(' and ')}`,
    chart,
  });
}

function drawDoubtMap(
  context: PageContext,
  title: string,
  column: (i: number) => number,
  plane: Plane,
  axes: [number, number],
  note: string,
): Html {
  const { drawing } = context;
  const chart = drawMap(drawing, plane.grid, {
    width: NARROW_WIDTH,
    xLabel: labelPosition(context, axes[0]),
    yLabel: labelPosition(context, axes[1]),
    colours: DOUBT_COLOURS,
    classOf: (i) => {
      const found = DOUBT_EDGES.findIndex((edge) => column(i) < edge);
      return found < 0 ? DOUBT_COLOURS.length - 1 : found;
    },
    describe: (i) => `${describeCell(context, plane, i)}: error ${formatPercent(column(i))}`,
  });
  return drawFigure({
    title,
    key: html`${new Html(drawClassLegend(['0', '5 %', '10 %', '20 %', '50 %', 'more'], DOUBT_COLOURS))}${keyEntry('hatched', 'not visited')}<span class="entry">${note}</span>`,
    label: `Map of the error: ${title}`,
    chart,
  });
}

/** A component in two dimensions: value, error, and sections; in three: its planes and sections. */
export function drawComponentMaps(context: PageContext, part: QuantityPart, component: Component): Html {
  const d = context.fit.data.dimensions;
  const maps = listPlanes(d).map((axes) => drawValueMap(context, part, component, axes));
  const sections = drawComponentCurves(
    context,
    part,
    component,
    d === 2 ? [0, 1] : [0, 1, 2],
    chooseSectionHeight(context),
  );
  if (d === 3) return html`${sections}${maps}`;
  const plane = evaluatePlane(context, 0, 1);
  const { byName } = plane;
  const column = byName.get(component.column);
  if (!column) return html``;
  const scale = createScale(column, plane.grid.visited);
  const note = isPositiveColumn(column.name)
    ? 'half-width of the interval / value'
    : 'half-width / largest value';
  const error = (i: number) => halfWidth(column, i) / scale(i);
  return html`${maps}${drawDoubtMap(context, 'How well it is known', error, plane, [0, 1], note)}<div class="stack">${sections}</div>`;
}

/** Half-width of a vector's interval against its largest length on the plane. */
function createVectorError(columns: readonly EvaluatedColumn[], visited: ArrayLike<number>) {
  const length = (i: number) => Math.hypot(...columns.map((column) => column.values[i] ?? 0));
  const half = (i: number) => Math.hypot(...columns.map((column) => halfWidth(column, i)));
  let largest = 0;
  for (let i = 0; i < visited.length; i++) if (visited[i] === 1) largest = Math.max(largest, length(i));
  return (i: number) => half(i) / (largest || 1);
}

/** Force or drift: arrows in each plane, how well they are known, and each component along its own axis. */
export function drawArrowFigure(context: PageContext, part: QuantityPart): Html {
  const { fit, units, drawing } = context;
  const d = fit.data.dimensions;
  const name = part.quantity;
  const figures = listPlanes(d).map((axes) => {
    const plane = evaluatePlane(context, ...axes);
    const { byName } = plane;
    const columns = axes.map((axis) => byName.get(part.components[axis]?.column ?? ''));
    const [along, across] = columns;
    if (!along || !across) return { arrows: html``, doubt: html`` };
    const crossesZero = (column: EvaluatedColumn, i: number) =>
      (column.low[i] ?? 0) <= 0 && (column.high[i] ?? 0) >= 0;
    const chart = drawArrows(drawing, plane.grid, {
      width: NARROW_WIDTH,
      xLabel: labelPosition(context, axes[0]),
      yLabel: labelPosition(context, axes[1]),
      along: along.values,
      across: across.values,
      distinct: (i) => !(crossesZero(along, i) && crossesZero(across, i)),
      formatLength: (length) => formatQuantity(length, part.quantity, units, 1),
      describe: (i) =>
        `${describeCell(context, plane, i)}: along ${context.coordinates[axes[0]]} ${describeValue(context, part, along, i)}, along ${context.coordinates[axes[1]]} ${describeValue(context, part, across, i)}`,
    });
    const arrows = drawFigure({
      title: `${name[0]?.toUpperCase()}${name.slice(1)}${describePlanePlace(context, ...axes)}`,
      key: html`${keyEntry('line', 'told from zero')}${keyEntry('faint', 'could be zero')}${keyEntry('hatched', 'not visited')}`,
      label: `Arrows of ${name} over ${axes.map((axis) => context.coordinates[axis]).join(' and ')}`,
      chart,
    });
    const doubt =
      d === 2
        ? drawDoubtMap(
            context,
            'How well it is known',
            createVectorError([along, across], plane.grid.visited),
            plane,
            axes,
            `half-width / largest ${name}`,
          )
        : html``;
    return { arrows, doubt };
  });
  const height = chooseSectionHeight(context);
  const sections = part.components.map((component, axis) =>
    drawComponentCurves(context, part, component, [axis], height),
  );
  if (d === 2)
    return html`${figures.map(({ arrows, doubt }) => html`${arrows}${doubt}`)}<div class="stack">${sections}</div>`;
  return html`${sections}${figures.map(({ arrows }) => arrows)}`;
}

/** Height that two sections should have to stand beside a map of the visited region. */
function chooseSectionHeight(context: PageContext): number {
  if (context.fit.data.dimensions > 2) return 230;
  const height = chooseMapHeight(layPlane(context.fit.visited, 0, 1).grid, NARROW_WIDTH);
  return Math.min(240, Math.max(150, Math.round(height / 2 - 15)));
}

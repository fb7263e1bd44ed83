/** Pictures of the coefficients along lines through the middle of the visited region. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import type { Chart } from '../charts/Drawing.js';
import { chooseRange, drawCurve } from '../charts/curveChart.js';
import { drawFigure } from '../figure.js';
import { formatAxisLabel, formatInterval, formatNumber, joinUnit } from '../format.js';
import { type Html, html } from '../html.js';
import type { LegendPart } from '../legend.js';
import { type Component, nameComponent, type QuantityPart } from './coefficientParts.js';
import {
  BROAD_WIDTH,
  capitalize,
  describeElsewhere,
  evaluateLine,
  labelPosition,
  NARROW_WIDTH,
  type PageContext,
  tabulatePlaces,
} from './Section.js';

/** Places along a line: enough for smooth curves, and a multiple of the usual cell counts. */
const PLACES = 128;

/** Value and interval at one place, in words. */
export function describeValue(
  context: PageContext,
  part: Pick<QuantityPart, 'quantity'>,
  column: Pick<EvaluatedColumn, 'values' | 'low' | 'high'>,
  i: number,
): string {
  const at = (values: Float64Array) => values[i] ?? Number.NaN;
  return joinUnit(
    formatInterval(at(column.values), at(column.low), at(column.high)),
    part.quantity,
    context.units,
  );
}

/** Key to the curves: it stands in each figure in one dimension, and once above all in more. */
export function listCurveMarks(): LegendPart[] {
  return [
    { sample: 'line', text: 'estimate' },
    { sample: 'band', text: 'interval at a place' },
    { sample: 'band-wide', text: 'band for the whole curve' },
    { sample: 'hatched', text: 'not visited' },
  ];
}

/** One picture per axis in `axes`. */
export function drawComponentCurves(
  context: PageContext,
  part: QuantityPart,
  component: Component,
  axes: readonly number[],
  height: number,
): Html {
  const { drawing, units, fit, coordinates } = context;
  const lines = axes.flatMap((axis) => {
    const line = evaluateLine(context, axis, PLACES);
    const column = line.byName.get(component.column);
    if (!column) return [];
    const { values: value, low, high, bandLow, bandHigh } = column;
    return [
      {
        axis,
        line,
        column,
        curve: { x: line.x, value, low, high, bandLow, bandHigh, visited: line.visited },
      },
    ];
  });
  // Sections of one coefficient share their vertical range, so that they can be compared.
  const ranges = lines.map(({ curve }) => chooseRange(curve));
  const range = [
    Math.min(...ranges.map(([low]) => low)),
    Math.max(...ranges.map(([, high]) => high)),
  ] as const;
  return html`${lines.map(({ axis, line, column, curve }) => {
    const name = nameComponent(part, component);
    const draw = (width: number): Chart =>
      drawCurve(drawing, curve, {
        width,
        height,
        xLabel: labelPosition(context, axis),
        yLabel: (exponent) => formatAxisLabel(name, part.quantity, units, exponent),
        range,
        describe: (i) => {
          const place = `${coordinates[axis]} = ${formatNumber(curve.x[i] ?? 0)}`;
          if (curve.visited[i] !== 1) return `${place}: not visited`;
          return `${place}: ${describeValue(context, part, column, i)}`;
        },
      });
    const isBroad = fit.data.dimensions === 1;
    const along = `along ${coordinates[axis] ?? ''}`;
    const elsewhere = describeElsewhere(context, [axis]);
    const title = isBroad ? capitalize(`${name} ${along}`) : `${capitalize(along)}, ${elsewhere}`;
    return drawFigure(context.figures, {
      name: `${component.column} along ${coordinates[axis]}`,
      title,
      fileTitle: capitalize(`${name} ${along}${isBroad ? '' : `, ${elsewhere}`}`),
      label: `${name} with intervals ${along}`,
      legend: isBroad ? listCurveMarks() : [],
      sharedLegend: isBroad ? [] : listCurveMarks(),
      chart: isBroad ? { broad: draw(BROAD_WIDTH), narrow: draw(NARROW_WIDTH) } : draw(NARROW_WIDTH),
      table: [
        ...tabulatePlaces(context, line.places),
        { name: component.column, values: column.values },
        { name: `${component.column}_low`, values: column.low },
        { name: `${component.column}_high`, values: column.high },
        { name: `${component.column}_band_low`, values: column.bandLow },
        { name: `${component.column}_band_high`, values: column.bandHigh },
        { name: 'visited', values: line.visited },
      ],
    });
  })}`;
}

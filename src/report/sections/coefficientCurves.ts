/** Coefficients along lines through the middle of the visited region: pictures and the same values as a table. */

import type { EvaluatedColumn } from '../../uncertainty/evaluateFit.js';
import { formatUnit } from '../../units.js';
import type { Chart } from '../charts/Drawing.js';
import { chooseRange, drawCurve } from '../charts/curveChart.js';
import { drawFigure, keyEntry } from '../figure.js';
import { formatAxisLabel, formatInterval, formatNumber, formatQuantity } from '../format.js';
import { type Html, html, userText } from '../html.js';
import { type Component, nameComponent, type QuantityPart } from './coefficientParts.js';
import { BROAD_WIDTH, evaluateLine, labelPosition, NARROW_WIDTH, type PageContext } from './Section.js';
import { cellCentre, findMiddle } from './visitedGrid.js';

/** Places along a line: enough for smooth curves, and a multiple of the usual cell counts. */
const PLACES = 128;

/** Value and interval at one place, in words. */
export function describeValue(
  context: PageContext,
  part: QuantityPart,
  column: EvaluatedColumn,
  i: number,
): string {
  const at = (values: Float64Array) => values[i] ?? Number.NaN;
  const unit = formatUnit(part.quantity, context.units);
  return `${formatInterval(at(column.values), at(column.low), at(column.high))}${unit === '' ? '' : ` ${unit}`}`;
}

/** Where a line along `axis` runs, e.g. `at y = 1.2 µm`; empty in one dimension. */
function describeLine(context: PageContext, axis: number): string {
  const middle = findMiddle(context.fit.visited);
  const others = context.coordinates.flatMap((name, b) =>
    b === axis
      ? []
      : [
          `${name} = ${formatQuantity(cellCentre(context.fit.visited, b, middle[b] ?? 0), 'position', context.units)}`,
        ],
  );
  return others.length === 0 ? '' : `at ${others.join(', ')}`;
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
    const { x, byName, visited } = evaluateLine(context, axis, PLACES);
    const column = byName.get(component.column);
    if (!column) return [];
    const { values: value, low, high, bandLow, bandHigh } = column;
    return [{ axis, column, curve: { x, value, low, high, bandLow, bandHigh, visited } }];
  });
  // Sections of one coefficient share their vertical range, so that they can be compared.
  const ranges = lines.map(({ curve }) => chooseRange(curve));
  const range = [
    Math.min(...ranges.map(([low]) => low)),
    Math.max(...ranges.map(([, high]) => high)),
  ] as const;
  return html`${lines.map(({ axis, column, curve }) => {
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
    const along = fit.data.dimensions === 1 ? '' : ` along ${coordinates[axis] ?? ''}`;
    const title =
      fit.data.dimensions === 1
        ? `${name} along ${coordinates[axis] ?? ''}`
        : `Section${along} ${describeLine(context, axis)}`;
    const upper = `${title[0]?.toUpperCase()}${title.slice(1)}`;
    const isBroad = fit.data.dimensions === 1;
    return drawFigure({
      title: upper,
      label: `${name} with intervals${along}`,
      key: isBroad
        ? html`${keyEntry('line', 'estimate')}${keyEntry('band', 'interval at a place')}${keyEntry('band-wide', 'band for the whole curve')}${keyEntry('hatched', 'not visited')}`
        : null,
      chart: isBroad ? { broad: draw(BROAD_WIDTH), narrow: draw(NARROW_WIDTH) } : draw(NARROW_WIDTH),
    });
  })}`;
}

/** The values along the sections as a table, folded away. */
export function drawLineTable(context: PageContext, part: QuantityPart): Html {
  const { fit, units, coordinates } = context;
  const rows = fit.data.dimensions === 1 ? 16 : 8;
  const unit = formatUnit(part.quantity, units);
  const position = formatUnit('position', units);
  const tables = coordinates.map((name, axis) => {
    const line = evaluateLine(context, axis, rows);
    const { byName, visited } = line;
    const body = Array.from(line.x, (x, i) => {
      if (visited[i] !== 1) return null;
      return html`<tr><td>${formatNumber(x, 4)}</td>${part.components.map((component) => {
        const column = byName.get(component.column);
        if (!column) return null;
        const at = (values: Float64Array) => values[i] ?? Number.NaN;
        return html`<td>${formatInterval(at(column.values), at(column.low), at(column.high))}</td><td>${formatNumber(at(column.bandLow))} to ${formatNumber(at(column.bandHigh))}</td>`;
      })}</tr>`;
    });
    const heads = part.components.map(
      (component) =>
        html`<th>${nameComponent(part, component)}${unit === '' ? '' : ` (${unit})`}</th><th>band</th>`,
    );
    const caption =
      fit.data.dimensions === 1
        ? null
        : html`<caption>Along ${userText(name)}, ${describeLine(context, axis)}</caption>`;
    return html`<div class="scroll"><table>${caption}<thead><tr><th>${userText(name)}${position === '' ? '' : ` (${position})`}</th>${heads}</tr></thead><tbody>${body}</tbody></table></div>`;
  });
  return html`<details${fit.data.dimensions === 1 ? html` open` : null}><summary>Values as a table</summary>${tables}</details>`;
}

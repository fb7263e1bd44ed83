/** The values along lines through the middle of the visited region as tables. */

import { formatUnit, type Quantity } from '../../units.js';
import { type ColumnFormat, createColumnFormat } from '../columnFormat.js';
import { formatPercent, formatPowerOfTen } from '../format.js';
import { type Html, html, userText } from '../html.js';
import { nameComponent, type QuantityPart } from './coefficientParts.js';
import { halfWidth } from './precision.js';
import { describeElsewhere, evaluateLine, type PageContext } from './Section.js';

const ROWS = 16;
const ROWS_OF_SECTIONS = 8;

function drawAxisTable(context: PageContext, part: QuantityPart, axis: number): Html {
  const { fit, units, coordinates } = context;
  const isOnly = fit.data.dimensions === 1;
  const line = evaluateLine(context, axis, isOnly ? ROWS : ROWS_OF_SECTIONS);
  const rows = Array.from(line.x.keys()).filter((i) => line.visited[i] === 1);
  const place = createColumnFormat(Array.from(line.x));
  const columns = part.components.flatMap((component) => {
    const column = line.byName.get(component.column);
    if (!column) return [];
    const numbers = rows.flatMap((i) => [column.values[i] ?? 0, column.low[i] ?? 0, column.high[i] ?? 0]);
    const halves = rows.map((i) => halfWidth(column, i));
    return [{ component, column, shape: createColumnFormat(numbers, halves) }];
  });
  const head = (text: string, quantity: Quantity, { exponent }: ColumnFormat) => {
    const inside = [exponent === 0 ? '' : formatPowerOfTen(exponent), formatUnit(quantity, units)];
    const unit = inside.filter(Boolean).join(' ');
    return `${text}${unit === '' ? '' : ` (${unit})`}`;
  };
  const confidence = formatPercent(fit.uncertainty.confidence);
  const name = coordinates[axis] ?? '';
  const body = rows.map(
    (i) =>
      html`<tr><td>${place.format(line.x[i] ?? 0)}</td>${columns.map(({ column, shape }) => {
        const at = (values: Float64Array) => shape.format(values[i] ?? Number.NaN);
        return html`<td><strong>${at(column.values)}</strong></td><td>${at(column.low)} to ${at(column.high)}</td><td>${at(column.bandLow)} to ${at(column.bandHigh)}</td>`;
      })}</tr>`,
  );
  const heads = columns.map(
    ({ component, shape }) =>
      html`<th>${head(nameComponent(part, component), part.quantity, shape)}</th><th>${confidence} interval</th><th>${confidence} band</th>`,
  );
  const caption = isOnly
    ? null
    : html`<caption>Along ${userText(name)}, ${describeElsewhere(context, [axis])}</caption>`;
  return html`<div class="scroll" tabindex="0" role="region" aria-label="Values along ${name}"><table>${caption}<thead><tr><th>${head(name, 'position', place)}</th>${heads}</tr></thead><tbody>${body}</tbody></table></div>`;
}

/** A table for each axis: open in one dimension, folded away in more. */
export function drawLineTables(context: PageContext, part: QuantityPart): Html {
  const isOnly = context.fit.data.dimensions === 1;
  const tables = context.coordinates.map((_, axis) => drawAxisTable(context, part, axis));
  return html`<details${isOnly ? html` open` : null}><summary>Values as a table</summary>${tables}</details>`;
}

/** Scalar coefficients and matrix components over planes, with their errors and sections. */

import { chooseMapHeight } from '../charts/mapChart.js';
import { type Html, html } from '../html.js';
import { drawComponentCurves } from './coefficientCurves.js';
import { type Component, nameComponent, type QuantityPart } from './coefficientParts.js';
import { drawErrorMap, drawValueMap, stripeByError } from './planeMaps.js';
import { createScale, halfWidth, isPositiveColumn, summarizePrecision } from './precision.js';
import { evaluatePlane, evaluateRegion, listPlanes, NARROW_WIDTH, type PageContext } from './Section.js';
import { layPlane } from './visitedGrid.js';

/** Heights of sections, and of those that stand two by two beside a map of the visited region. */
export function chooseSectionHeight(context: PageContext): number {
  if (context.fit.data.dimensions > 2) return 230;
  const height = chooseMapHeight(layPlane(context.fit.visited, 0, 1).grid, NARROW_WIDTH);
  return Math.min(240, Math.max(165, Math.round(height / 2 + 12)));
}

/** Two maps and, where the page is broad, two sections beside them. */
export function layBeside(maps: Html, sections: Html): Html {
  return html`<div class="trio"><div class="pictures">${maps}</div><div class="stack">${sections}</div></div>`;
}

/**
 * A component in two dimensions: value, error and sections; in three: sections, then the three planes through the
 * middle (left out where the component is the same everywhere: there is nothing to see on them).
 */
export function drawComponentMaps(context: PageContext, part: QuantityPart, component: Component): Html {
  const d = context.fit.data.dimensions;
  const axes = Array.from({ length: d }, (_, axis) => axis);
  const region = evaluateRegion(context);
  const whole = region.byName.get(component.column);
  const isUniform = whole && summarizePrecision(whole, region.columns, region.visited)?.isUniform;
  const name = nameComponent(part, component);
  const drawPlane = (first: number, second: number) => {
    const plane = evaluatePlane(context, first, second);
    const column = plane.byName.get(component.column);
    if (!column) return { value: html``, error: html`` };
    const scale = createScale(column, plane.columns, plane.grid.visited);
    const error = (i: number) => halfWidth(column, i) / scale(i);
    const scaleName = isPositiveColumn(column.name) ? 'the value' : `the largest ${part.quantity}`;
    const { values, low, high } = column;
    const subject = { file: component.column, name, quantity: part.quantity, values, low, high };
    const uncertainty = stripeByError(error, scaleName);
    const note = d === 2 ? 'The estimate in each cell.' : '';
    return {
      value: drawValueMap(context, { ...subject, uncertainty, note }, plane, [first, second]),
      error:
        d === 2
          ? drawErrorMap(context, { file: component.column, name, scale: scaleName }, error, plane, [
              first,
              second,
            ])
          : html``,
    };
  };
  const drawSections = () =>
    drawComponentCurves(context, part, component, axes, chooseSectionHeight(context));
  if (d === 3) {
    const sections = drawSections();
    const maps = isUniform ? [] : listPlanes(d).map(([first, second]) => drawPlane(first, second).value);
    return html`<div class="pictures">${sections}</div>${maps.length > 0 ? html`<div class="pictures">${maps}</div>` : null}`;
  }
  const { value, error } = drawPlane(0, 1);
  return layBeside(html`${value}${error}`, drawSections());
}

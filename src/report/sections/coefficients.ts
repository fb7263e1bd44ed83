/** The coefficients with their errors, drawn over the visited region. */

import { formatNumber, formatPercent, formatQuantity } from '../format.js';
import { type Html, html } from '../html.js';
import { listQuantities, nameComponent, type QuantityPart } from './coefficientParts.js';
import { drawComponentCurves, drawLineTable } from './coefficientCurves.js';
import { drawArrowFigure, drawComponentMaps } from './coefficientMaps.js';
import { createScale, summarizePrecision } from './precision.js';
import { evaluateRegion, type PageContext, type Section } from './Section.js';

function saySummary(context: PageContext, part: QuantityPart): Html {
  const { byName, visited } = evaluateRegion(context);
  const confidence = formatPercent(context.fit.uncertainty.confidence);
  return html`<p>${part.meaning} ${part.components.map((component) => {
    const column = byName.get(component.column);
    const summary = column && summarizePrecision(column, visited);
    if (!column || !summary) return null;
    const name = nameComponent(part, component);
    const sentence = `${name[0]?.toUpperCase()}${name.slice(1)}`;
    const unit = formatQuantity(summary.high, part.quantity, context.units);
    const range =
      formatNumber(summary.low) === formatNumber(summary.high)
        ? html`is ${unit} throughout`
        : html`runs from ${formatNumber(summary.low)} to ${unit}`;
    const size = part.isVector
      ? formatQuantity(summary.medianError * createScale(column, visited)(0), part.quantity, context.units, 2)
      : formatPercent(summary.medianError);
    const poor =
      summary.shareKnown < 0.995
        ? html`; in ${formatPercent(1 - summary.shareKnown)} of the region the ${confidence} interval is wider than the
            ${part.isVector ? 'largest value' : 'value'} itself`
        : null;
    return html`${sentence} ${range}, known to within ${size} at the typical place${poor}. `;
  })}</p>`;
}

function drawQuantity(context: PageContext, part: QuantityPart): Html {
  const d = context.fit.data.dimensions;
  const title = html`<h3>${part.quantity[0]?.toUpperCase()}${part.quantity.slice(1)}</h3>`;
  const intro = html`${title}${saySummary(context, part)}`;
  if (d === 1) {
    return html`${intro}<div class="pictures two">${part.components.map((component) =>
      drawComponentCurves(context, part, component, [0], 300),
    )}<div class="beside">${drawLineTable(context, part)}</div></div>`;
  }
  const rows = part.isVector
    ? html`<div class="pictures">${drawArrowFigure(context, part)}</div>`
    : part.components.map(
        (component) => html`<div class="pictures">${drawComponentMaps(context, part, component)}</div>`,
      );
  return html`${intro}${rows}${drawLineTable(context, part)}`;
}

export function writeCoefficients(context: PageContext): Section {
  const { fit } = context;
  const { columns } = evaluateRegion(context);
  const parts = listQuantities(fit.model, columns);
  const confidence = formatPercent(fit.uncertainty.confidence);
  const equation =
    fit.model.order === 'second'
      ? html`<p class="equation">d<var>v</var> = [<var>force</var>(<var>x</var>) − <var>friction</var>(<var>x</var>) <var>v</var>] d<var>t</var> + √<var>noise</var>(<var>x</var>) d<var>W</var></p>`
      : html`<p class="equation">d<var>x</var> = <var>drift</var>(<var>x</var>) d<var>t</var> + √(2 <var>diffusion</var>(<var>x</var>)) d<var>W</var>  <span>(Itô)</span></p>`;
  const reading =
    fit.model.order === 'first'
      ? html`<p><strong>The drift is stated in the Itô reading.</strong> Where the diffusion varies from place to place,
another reading (Stratonovich, isothermal) gives another drift for the same motion; the diffusion is the same in all.</p>`
      : null;
  const body = html`${equation}${reading}
<p>Inner bands hold the true value at any one place with ${confidence} confidence; outer bands hold the whole curve over
the visited region at once with the same confidence. Nothing is claimed where the ground is hatched: the recording has
hardly been there, and a line through it only shows how the formula runs on.</p>
<p class="hint" id="how-to-read">Point at a picture to read its values, or move to it with the tab key and walk with the arrow keys.</p>
${parts.map((part) => drawQuantity(context, part))}`;
  return { id: 'coefficients', title: 'The coefficients', body };
}

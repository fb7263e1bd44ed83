/** The coefficients with their errors, drawn over the visited region. */

import { formatNumber, formatPercent, formatQuantity, formatRange, joinUnit } from '../format.js';
import { type Html, html } from '../html.js';
import { writeLegend } from '../legend.js';
import { drawCirculation } from './circulation.js';
import { listQuantities, nameComponent, type QuantityPart } from './coefficientParts.js';
import { drawComponentCurves, listCurveMarks } from './coefficientCurves.js';
import { drawComponentMaps } from './coefficientMaps.js';
import { drawLineTables } from './coefficientTables.js';
import { summarizePrecision } from './precision.js';
import { capitalize, evaluateRegion, type PageContext, type Section } from './Section.js';
import { drawVectorMaps } from './vectorMaps.js';

function saySummary(context: PageContext, part: QuantityPart): Html {
  const { columns, byName, visited } = evaluateRegion(context);
  const { units } = context;
  const confidence = formatPercent(context.fit.uncertainty.confidence);
  const withUnit = (text: string) => joinUnit(text, part.quantity, units);
  const sentences = part.components.map((component) => {
    const column = byName.get(component.column);
    const summary = column && summarizePrecision(column, columns, visited);
    if (!summary) return null;
    const name = capitalize(nameComponent(part, component));
    const range = summary.isUniform
      ? `is ${withUnit(formatNumber(summary.high))} throughout`
      : `runs from ${withUnit(formatRange(summary.low, summary.high))}`;
    const size = part.isVector
      ? formatQuantity(summary.medianHalfWidth, part.quantity, units, 2)
      : formatPercent(summary.medianError);
    const poor =
      summary.shareKnown < 0.995
        ? `; in ${formatPercent(1 - summary.shareKnown)} of the region the ${confidence} interval is wider than the ${part.isVector ? `largest ${part.quantity}` : 'value'} itself`
        : '';
    return `${name} ${range}, known to ±${size} at the typical place${poor}. `;
  });
  return html`<p>${part.meaning} ${sentences}</p>`;
}

function drawQuantity(context: PageContext, part: QuantityPart): Html {
  const d = context.fit.data.dimensions;
  const intro = html`<h3 id="${part.quantity}">${capitalize(part.quantity)}</h3>${saySummary(context, part)}`;
  if (d === 1) {
    return html`${intro}${part.components.map(
      (component) =>
        html`<div class="duo">${drawComponentCurves(context, part, component, [0], 360)}${drawLineTables(context, part)}</div>`,
    )}`;
  }
  const pictures = part.isVector
    ? drawVectorMaps(context, part)
    : part.components.map((component) => drawComponentMaps(context, part, component));
  return html`${intro}${pictures}${drawLineTables(context, part)}${part.isVector ? drawCirculation(context, part) : null}`;
}

const EQUATIONS = {
  second: html`<p class="equation">d<var>v</var> = [ <var>force</var>(<var>x</var>) − <var>friction</var>(<var>x</var>) <var>v</var> ] d<var>t</var> + <span class="root">√<var>noise</var>(<var>x</var>)</span> d<var>W</var></p>`,
  first: html`<p class="equation">d<var>x</var> = <var>drift</var>(<var>x</var>) d<var>t</var> + <span class="root">√(2 <var>diffusion</var>(<var>x</var>))</span> d<var>W</var> <small>(Itô)</small></p>`,
};

export function writeCoefficients(context: PageContext): Section {
  const { fit } = context;
  const { columns } = evaluateRegion(context);
  const parts = listQuantities(fit.model, columns);
  const confidence = formatPercent(fit.uncertainty.confidence);
  const reading =
    fit.model.order === 'first'
      ? html`<p><strong>The drift is stated in the Itô reading.</strong> Where the diffusion varies from place to place,
another reading (Stratonovich, isothermal) gives another drift for the same motion; the diffusion is the same in all.</p>`
      : null;
  const body = html`${EQUATIONS[fit.model.order]}${reading}
<p>Inner bands hold the true value at any one place with ${confidence} confidence; outer bands hold the whole curve over
the visited region at once with the same confidence. Nothing is claimed where the ground is hatched: the recording has
hardly been there, and a line through it only shows how the formula runs on.</p>
${fit.data.dimensions > 1 ? html`<div class="key">${writeLegend(listCurveMarks())}</div>` : null}
<p class="hint" id="how-to-read">Point at a picture to read its values, or move to it with the tab key and walk with the arrow keys.</p>
${parts.map((part) => drawQuantity(context, part))}`;
  return { id: 'coefficients', title: 'The coefficients', body };
}

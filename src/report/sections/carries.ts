/** Whether the recording can carry the answer: what the survey found, in words, and what to be wary of. */

import { formatCount, formatInterval, formatNumber, formatPercent, formatQuantity } from '../format.js';
import { type Html, html, tameText, userText } from '../html.js';
import { mergeWarnings, readNumber, readText, readWarnings } from '../surveyFacts.js';
import { formatUnit } from '../../units.js';
import { evaluateRegion, type PageContext, type Section } from './Section.js';
import { listQuantities, nameComponent } from './coefficientParts.js';
import { summarizePrecision } from './precision.js';
import { countVisited } from './visitedGrid.js';

function sayOrder(context: PageContext): Html {
  const { fit, units } = context;
  const recommended = readText(fit.survey, 'recommendedOrder');
  const relaxation = readNumber(fit.survey, 'relaxationTime');
  const remembered =
    relaxation === null
      ? html`No memory of the velocity between frames was resolved.`
      : html`A velocity is remembered for ${formatQuantity(relaxation, 'time', units)},
          ${formatNumber(relaxation / fit.data.samplingInterval, 2)} sampling intervals.`;
  const advice =
    recommended === null
      ? null
      : recommended === fit.model.order
        ? html` The survey recommends a model of ${recommended} order, the one fitted here.`
        : html` The survey recommends a model of ${recommended} order; this fit is of
            <strong>${fit.model.order}</strong> order.`;
  return html`<li>${remembered}${advice}</li>`;
}

function sayLocalization(context: PageContext): Html {
  const { fit, units, coordinates } = context;
  const parts = fit.localizationError.map((error, axis) => {
    const interval = formatInterval(error.value, error.low, error.high);
    return html`${axis > 0 ? ', ' : ''}${userText(coordinates[axis] ?? '')}: ${interval}`;
  });
  const unit = formatUnit('position', units);
  return html`<li>Localization error (standard deviation, with its ${formatPercent(fit.uncertainty.confidence)}
interval): ${parts}${unit === '' ? '' : ` ${unit}`}.</li>`;
}

function sayPrecision(context: PageContext): Html {
  if (countVisited(context.fit.visited) === 0)
    return html`<li>No cell was visited often enough for the region to be called visited.</li>`;
  const { columns, byName, visited } = evaluateRegion(context);
  const rows = listQuantities(context.fit.model, columns).flatMap((part) =>
    part.components.flatMap((component) => {
      const column = byName.get(component.column);
      const summary = column && summarizePrecision(column, visited);
      return summary ? [{ name: nameComponent(part, component), error: summary.medianError }] : [];
    }),
  );
  rows.sort((a, b) => a.error - b.error);
  const [best, worst] = [rows[0], rows[rows.length - 1]];
  if (!best || !worst) return html``;
  return html`<li>At the typical visited place the best known coefficient, ${best.name}, has an interval of
±${formatPercent(best.error)}, the least known, ${worst.name}, of ±${formatPercent(worst.error)}${
    context.fit.model.order === 'second'
      ? ' (force against its largest value)'
      : ' (drift against its largest value)'
  }.</li>`;
}

export function writeCarries(context: PageContext): Section {
  const { fit } = context;
  const warnings = mergeWarnings(fit.warnings, readWarnings(fit.survey));
  const body = html`<ul>
${sayOrder(context)}
${sayLocalization(context)}
<li>The errors rest on ${formatCount(fit.uncertainty.blocks)} independent pieces of recording (${tameText(fit.uncertainty.method, 200)}).</li>
${sayPrecision(context)}
</ul>
${
  warnings.length === 0
    ? html`<p class="verdict good">The survey and the fit gave no warning.</p>`
    : html`<h3>Warnings</h3><ul class="notes">${warnings.map(
        (warning) =>
          html`<li>${tameText(warning.message, 600)}<span class="tag">${tameText(warning.code, 60)}</span></li>`,
      )}</ul>`
}`;
  return { id: 'carries', title: 'Can it carry the answer?', body };
}

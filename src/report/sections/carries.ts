/** Whether the recording can carry the answer: what the survey found, in words, and what to be wary of. */

import { formatUnit } from '../../units.js';
import {
  formatCount,
  formatInterval,
  formatNumber,
  formatPercent,
  formatRange,
  joinUnit,
} from '../format.js';
import { type Html, html, tameText, userText } from '../html.js';
import { isFacts, mergeWarnings, readNumber, readText, readWarnings } from '../surveyFacts.js';
import { listQuantities, nameComponent } from './coefficientParts.js';
import { drawMemoryFigure } from './memoryFigure.js';
import { summarizePrecision } from './precision.js';
import { capitalize, evaluateRegion, type PageContext, type Section } from './Section.js';
import { countVisited } from './visitedGrid.js';
import { writeWarnings } from './warnings.js';

function sayMemory(context: PageContext): Html {
  const { fit, units } = context;
  const relaxation = readNumber(fit.survey, 'relaxationTime');
  if (relaxation === null)
    return html`<li>No memory of the velocity from frame to frame was resolved: the camera sees the motion at first order.</li>`;
  const interval = fit.survey.relaxationTimeInterval;
  const [low, high] = isFacts(interval)
    ? [readNumber(interval, 'low') ?? Number.NaN, readNumber(interval, 'high') ?? Number.NaN]
    : [Number.NaN, Number.NaN];
  const frames = relaxation / fit.data.samplingInterval;
  const judgement =
    frames < 1
      ? 'that is short: most of a velocity is gone by the next frame'
      : frames > 20
        ? 'that is long: a recording holds few relaxations, and the friction stays the less certain for it'
        : 'neither too short to be seen nor too long to be measured';
  return html`<li>A velocity is remembered for ${joinUnit(formatInterval(relaxation, low, high), 'time', units)}, or
${formatNumber(frames, 2)} sampling intervals: ${judgement}.</li>`;
}

function sayOrder({ fit }: PageContext): Html | null {
  const recommended = readText(fit.survey, 'recommendedOrder');
  if (recommended === null) return null;
  return recommended === fit.model.order
    ? html`<li>The survey recommends a model of ${recommended} order, the one fitted here.</li>`
    : html`<li>The survey recommends a model of ${tameText(recommended, 20)} order; <strong>this fit is of ${fit.model.order} order.</strong></li>`;
}

function sayLocalization({ fit, units, coordinates }: PageContext): Html {
  const parts = fit.localizationError.map(
    (error, axis) =>
      html`${axis > 0 ? '; ' : ''}${userText(coordinates[axis] ?? '')} ${formatInterval(error.value, error.low, error.high)}`,
  );
  const unit = formatUnit('position', units);
  return html`<li>Localization error (standard deviation, with its ${formatPercent(fit.uncertainty.confidence)}
interval): ${parts}${unit === '' ? '' : ` ${unit}`}.</li>`;
}

function sayBound({ fit }: PageContext): Html | null {
  const bound = fit.survey.expectedPrecision;
  if (!isFacts(bound)) return null;
  const [friction, noise] = [readNumber(bound, 'friction'), readNumber(bound, 'noise')];
  if (friction === null || noise === null) return null;
  return html`<li>Were they the same everywhere, friction could be known to a standard deviation of ${formatPercent(friction)} and noise
to ${formatPercent(noise)} at best from so many positions (Cramér–Rao bound).</li>`;
}

/** Range and typical error of every coefficient over the visited region. */
function drawPrecision(context: PageContext): Html {
  const { fit, units } = context;
  if (countVisited(fit.visited) === 0)
    return html`<p>No cell was visited often enough for the region to be called visited.</p>`;
  const { columns, byName, visited } = evaluateRegion(context);
  const rows = listQuantities(fit.model, columns).flatMap((part) =>
    part.components.flatMap((component) => {
      const column = byName.get(component.column);
      const summary = column && summarizePrecision(column, columns, visited);
      if (!summary) return [];
      const error = Number.isFinite(summary.medianError) ? `±${formatPercent(summary.medianError)}` : '–';
      return [
        html`<tr><th class="words">${capitalize(nameComponent(part, component))}</th><td>${joinUnit(formatRange(summary.low, summary.high), part.quantity, units)}</td><td>${error}</td><td>${formatPercent(summary.shareKnown)}</td></tr>`,
      ];
    }),
  );
  const changing = fit.model.order === 'second' ? 'force' : 'drift';
  return html`<div class="scroll" tabindex="0" role="region" aria-label="Precision of the coefficients"><table>
<thead><tr><th class="words">Coefficient</th><th>Over the region</th><th>Typical interval</th><th>Region known</th></tr></thead>
<tbody>${rows}</tbody></table></div>
<p class="aside">${formatPercent(fit.uncertainty.confidence)} intervals against the value, those of the ${changing} against its largest; “known” is where the interval is narrower than that.</p>`;
}

export function writeCarries(context: PageContext): Section {
  const { fit } = context;
  const warnings = mergeWarnings(fit.warnings, readWarnings(fit.survey));
  const verdict =
    warnings.length === 0
      ? html`<p class="verdict good">The survey and the fit gave no warning.</p>`
      : html`<p class="verdict bad">The survey and the fit gave ${warnings.length === 1 ? 'a warning' : `${formatCount(warnings.length)} warnings`}: read ${warnings.length === 1 ? 'it' : 'them'} before the rest.</p>${writeWarnings(warnings)}`;
  const memory = drawMemoryFigure(context);
  const words = html`<div><ul>
${sayMemory(context)}
${sayOrder(context)}
${sayLocalization(context)}
${sayBound(context)}
<li>The errors rest on ${formatCount(fit.uncertainty.blocks)} independent pieces of recording (${tameText(fit.uncertainty.method, 200)}).</li>
</ul></div>`;
  const precision = html`<div>${drawPrecision(context)}</div>`;
  const body = html`${verdict}<div class="duo">${words}${memory ?? precision}</div>${memory === null ? null : precision}`;
  return { id: 'carries', title: 'Can it carry the answer?', body };
}

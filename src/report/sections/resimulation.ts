/** The recording beside simulated recordings of the fitted model. */

import type { ResimulationResult } from '../../checks/ResimulationResult.js';
import { drawSeries } from '../charts/seriesChart.js';
import { drawFigure, keyEntry } from '../figure.js';
import { formatCount, formatNumber, formatP, formatPercent, formatWithError } from '../format.js';
import { type Html, html, tameText } from '../html.js';
import { NARROW_WIDTH, type PageContext, type Section } from './Section.js';

/** Coefficients listed one by one; more would be a book. */
const REFIT_ROWS = 60;

/** The verdict in one sentence, shared with the terminal summary. */
export function sayVerdict(result: ResimulationResult): string {
  const p = formatP(result.p);
  const p_ = p.startsWith('<') ? `p ${p}` : `p = ${p}`;
  return result.consistent
    ? `Recordings simulated from the fitted model look like the real one: taken together, the statistics below do not tell them apart (${p_}).`
    : `Recordings simulated from the fitted model differ from the real one (${p_}): the model misses something that the statistics below see.`;
}

function drawStatistics(result: ResimulationResult): Html {
  return html`<div class="scroll"><table>
<thead><tr><th class="words">Statistic</th><th>Recorded</th><th>Simulated, 95 %</th><th>p</th><th>p, corrected</th></tr></thead>
<tbody>${result.statistics.map((statistic) => {
    const odd = statistic.adjusted < result.level;
    return html`<tr><th class="words">${tameText(statistic.title, 90)}</th><td>${formatNumber(statistic.recorded)}</td><td>${formatNumber(statistic.low)} to ${formatNumber(statistic.high)}</td><td>${formatP(statistic.p)}</td><td${odd ? html` class="no"` : null}>${formatP(statistic.adjusted)}</td></tr>`;
  })}</tbody></table></div>
<p class="aside">Each statistic measures a distance from what the model gives; p is the share of simulated recordings
at least as far away, and the corrected p allows for looking at ${formatCount(result.statistics.length)} of them.</p>`;
}

function drawRefit(result: ResimulationResult): Html | null {
  if (result.refit.length === 0) return null;
  const shown = result.refit.slice(0, REFIT_ROWS);
  return html`<h3>Put in and got back</h3>
<p>The same estimator, applied to the simulated tracks, should return the coefficients that were put in. What differs by
many standard errors is bias of the estimator at this design.</p>
<details${result.refit.length <= 12 ? html` open` : null}><summary>${formatCount(result.refit.length)} coefficients</summary><div class="scroll"><table>
<thead><tr><th>Coefficient</th><th>Put in</th><th>Got back</th><th>Difference / error</th></tr></thead>
<tbody>${shown.map((row) => {
    const error = row.standardError;
    const ratio = error === null || error <= 0 ? null : (row.refitted - row.putIn) / error;
    return html`<tr><td>${tameText(row.name, 60)}</td><td>${formatNumber(row.putIn, 4)}</td><td>${error === null ? formatNumber(row.refitted, 4) : formatWithError(row.refitted, error)}</td><td>${ratio === null ? '–' : formatNumber(ratio, 2)}</td></tr>`;
  })}</tbody></table></div>${
    shown.length < result.refit.length
      ? html`<p>${formatCount(result.refit.length - shown.length)} more are in the result file.</p>`
      : null
  }</details>`;
}

export function writeResimulation(context: PageContext): Section | null {
  const result = context.resimulation;
  if (!result) return null;
  const pictures = result.series.map((series) =>
    drawFigure({
      title: tameText(series.title, 90),
      label: `${tameText(series.title, 90)}: recorded curve over the band of simulated ones`,
      chart: drawSeries(context.drawing, series, { width: NARROW_WIDTH, height: 240 }),
    }),
  );
  const body = html`<p>The fitted model was simulated ${formatCount(result.replicates)} times at the recorded design (same
starts, frames, gaps and localization error; seed ${result.seed}), and each simulated recording was measured like the real one.</p>
<p class="verdict ${result.consistent ? 'good' : 'bad'}">${sayVerdict(result)} <span class="tag">A right model is called
inconsistent in at most ${formatPercent(result.level)} of studies.</span></p>
${result.warnings.length > 0 ? html`<ul class="notes">${result.warnings.map((warning) => html`<li>${tameText(warning.message, 600)}<span class="tag">${tameText(warning.code, 60)}</span></li>`)}</ul>` : null}
<div class="key">${keyEntry('line', 'recording')}${keyEntry('simulated', 're-simulation: median and 95 % of simulated recordings')}</div>
<div class="pictures">${pictures}</div>
<h3>Statistics</h3>${drawStatistics(result)}${drawRefit(result)}`;
  return { id: 'resimulation', title: 'The recording beside its re-simulation', body };
}

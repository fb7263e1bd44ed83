/** The recording beside simulated recordings of the fitted model. */

import type { ResimulationResult, ResimulationStatistic } from '../../checks/ResimulationResult.js';
import { drawSeries } from '../charts/seriesChart.js';
import { drawFigure } from '../figure.js';
import {
  formatCount,
  formatNumber,
  formatP,
  formatPercent,
  formatRange,
  formatWithError,
} from '../format.js';
import { Html, html, tameText } from '../html.js';
import { type LegendPart, writeLegend } from '../legend.js';
import { sayP } from '../statements.js';
import { capitalize, NARROW_WIDTH, type PageContext, type Section } from './Section.js';
import { writeWarnings } from './warnings.js';

/** Coefficients listed one by one; more would be a book. */
const REFIT_ROWS = 60;

const MARKS: readonly LegendPart[] = [
  { sample: 'line', text: 'recording' },
  { sample: 'simulated', text: 're-simulation: median and 95 % of simulated recordings' },
];

/** The verdict in one sentence, shared with the terminal summary. */
export function sayVerdict(result: ResimulationResult): string {
  return result.consistent
    ? `Recordings simulated from the fitted model look like the real one: all statistics taken together do not tell them apart (${sayP(result.p)}).`
    : `Recordings simulated from the fitted model differ from the real one (${sayP(result.p)}): the model misses something that the statistics see.`;
}

const GAUGE = { width: 140, height: 16, margin: 6 };

/** The recorded value on the range of the simulated ones, as a small picture in a table. */
function drawGauge({ recorded, low, high }: ResimulationStatistic, odd: boolean): Html {
  const room = Math.max(high - low, Number.MIN_VALUE) * 0.35;
  const ends = [Math.min(low - room, recorded), Math.max(high + room, recorded)] as const;
  const at = (value: number) =>
    (
      GAUGE.margin +
      ((value - ends[0]) / Math.max(ends[1] - ends[0], Number.MIN_VALUE)) * (GAUGE.width - 2 * GAUGE.margin)
    ).toFixed(1);
  if (![recorded, low, high].every(Number.isFinite)) return html``;
  const middle = GAUGE.height / 2;
  const width = (Number(at(high)) - Number(at(low))).toFixed(1);
  return new Html(
    `<svg class="gauge" viewBox="0 0 ${GAUGE.width} ${GAUGE.height}" aria-hidden="true"><path d="M0,${middle}h${GAUGE.width}" stroke="var(--rule)"/><rect x="${at(low)}" y="3" width="${width}" height="${GAUGE.height - 6}" fill="var(--simulated-band)" stroke="var(--simulated)" stroke-width="0.75"/><circle cx="${at(recorded)}" cy="${middle}" r="4.5" fill="var(--${odd ? 'bad' : 'line'})"/></svg>`,
  );
}

function drawStatistics(result: ResimulationResult): Html {
  const rows = result.statistics.map((statistic) => {
    const odd = statistic.adjusted <= result.level;
    return html`<tr><th class="words">${capitalize(tameText(statistic.title, 90))}</th><td>${drawGauge(statistic, odd)}</td><td${odd ? html` class="no"` : null}>${formatP(statistic.adjusted)}</td><td>${formatP(statistic.p)}</td><td>${formatNumber(statistic.recorded)}</td><td>${formatRange(statistic.low, statistic.high)}</td></tr>`;
  });
  return html`<div class="scroll" tabindex="0" role="region" aria-label="Statistics of the recording and of simulated ones"><table>
<thead><tr><th class="words">Statistic</th><th class="words">Recorded among simulated</th><th>p, corrected</th><th>p alone</th><th>Recorded</th><th>Simulated, 95 %</th></tr></thead>
<tbody>${rows}</tbody></table></div>
<p class="aside">Each statistic measures a distance from what the model gives; p is the share of simulated recordings
at least as far away, and the corrected p allows for looking at ${formatCount(result.statistics.length)} of them.</p>`;
}

/** Mean residence and first-passage times in the regions that were named. */
function drawTimes(result: ResimulationResult): Html | null {
  if (result.times.length === 0) return null;
  const show = (value: number | null): string => (value === null ? 'not seen' : formatNumber(value));
  const rows = result.times.map(
    ({ name, recorded, events, low, median, high }) =>
      html`<tr><th class="words">${capitalize(tameText(name.replace(':', ' '), 90))}</th><td>${formatCount(events)}</td><td>${show(recorded)}</td><td>${show(median)}</td><td>${show(low)} to ${show(high)}</td></tr>`,
  );
  return html`<h3>Times in and between regions</h3><div class="scroll" tabindex="0" role="region" aria-label="Mean residence and first-passage times"><table>
<thead><tr><th class="words">Mean time</th><th>Ends seen</th><th>Recorded</th><th>Simulated</th><th>Simulated, 95 %</th></tr></thead>
<tbody>${rows}</tbody></table></div>`;
}

function drawRefit(result: ResimulationResult): Html | null {
  if (result.refit.length === 0) return null;
  const rows = result.refit.slice(0, REFIT_ROWS).map((row) => {
    const error = row.standardError;
    const ratio = error === null || error <= 0 ? null : (row.refitted - row.putIn) / error;
    const back = error === null ? formatNumber(row.refitted, 4) : formatWithError(row.refitted, error);
    return html`<tr><td>${tameText(row.name, 60)}</td><td>${formatNumber(row.putIn, 4)}</td><td>${back}</td><td>${ratio === null ? '–' : formatNumber(ratio, 2)}</td></tr>`;
  });
  return html`<h3>Put in and got back</h3>
<p>The same estimator, applied to the simulated tracks, should return the coefficients that were put in. What differs by
many standard errors is bias of the estimator at this design.</p>
<details${result.refit.length <= 12 ? html` open` : null}><summary>${formatCount(result.refit.length)} coefficients</summary><div class="scroll" tabindex="0" role="region" aria-label="Coefficients put in and got back"><table>
<thead><tr><th>Coefficient</th><th>Put in</th><th>Got back</th><th>Difference / error</th></tr></thead>
<tbody>${rows}</tbody></table></div>${
    rows.length < result.refit.length
      ? html`<p>${formatCount(result.refit.length - rows.length)} more are in the result file.</p>`
      : null
  }</details>`;
}

export function writeResimulation(context: PageContext): Section | null {
  const result = context.resimulation;
  if (!result) return null;
  const pictures = result.series.map((series) => {
    const numbers = (values: readonly (number | null)[]) => values.map((value) => value ?? Number.NaN);
    return drawFigure(context.figures, {
      name: `resimulation ${series.name}`,
      title: tameText(series.title, 90),
      label: `${tameText(series.title, 90)}: recorded curve over the band of simulated ones`,
      sharedLegend: MARKS,
      chart: drawSeries(context.drawing, series, { width: NARROW_WIDTH, height: 240 }),
      table: [
        { name: 'x', values: series.x },
        { name: 'recorded', values: numbers(series.recorded) },
        { name: 'simulated_low', values: numbers(series.low) },
        { name: 'simulated_median', values: numbers(series.median) },
        { name: 'simulated_high', values: numbers(series.high) },
      ],
    });
  });
  const body = html`<p>The fitted model was simulated ${formatCount(result.replicates)} times at the recorded design (same
starts, frames, gaps and localization error; seed ${result.seed}), and each simulated recording was measured like the real one.</p>
<p class="verdict ${result.consistent ? 'good' : 'bad'}">${sayVerdict(result)} <span class="tag">A right model is called
inconsistent in at most ${formatPercent(result.level)} of studies.</span></p>
${result.warnings.length > 0 ? writeWarnings(result.warnings) : null}
${pictures.length > 0 ? html`<div class="key">${writeLegend(MARKS)}</div><div class="pictures">${pictures}</div>` : null}
<h3>Statistics</h3>${drawStatistics(result)}${drawTimes(result)}${drawRefit(result)}`;
  return { id: 'resimulation', title: 'The recording beside its re-simulation', body };
}

/** What was recorded: counts, a picture of the tracks, and where they have been. */

import { formatCount, formatPercent, formatQuantity, formatSetting, joinUnit } from '../format.js';
import { html } from '../html.js';
import { readNumber } from '../surveyFacts.js';
import type { PageContext, Section } from './Section.js';
import { drawTrackFigures } from './trackFigures.js';
import { drawVisitFigures } from './visitFigures.js';
import { countVisited } from './visitedGrid.js';

export function writeRecorded(context: PageContext): Section {
  const { fit, units } = context;
  const { data } = fit;
  const missing = readNumber(fit.survey, 'missingFrames');
  const duration = readNumber(fit.survey, 'duration');
  const interval = joinUnit(formatSetting(data.samplingInterval), 'time', units);
  const facts = [
    ['Tracks', formatCount(data.tracks)],
    ['Positions', formatCount(data.positions)],
    ['Positions per track', formatCount(data.positions / Math.max(1, data.tracks))],
    ['Sampling interval', interval],
    duration === null ? null : ['From first to last', formatQuantity(duration, 'time', units)],
    missing === null ? null : ['Missing frames', formatCount(missing)],
    ['Visited', formatPercent(countVisited(fit.visited) / Math.max(1, fit.visited.counts.length))],
  ].filter((fact) => fact !== null);
  const body = html`<dl class="facts">${facts.map(([name, value]) => html`<div><dt>${name}</dt><dd>${value}</dd></div>`)}</dl>
<p class="hint">Of the ${formatCount(fit.visited.counts.length)} cells of the grid, those with at least ${formatCount(fit.visited.threshold)}
positions count as visited; they hold ${formatPercent(shareInside(fit.visited))} of all positions. Everything below speaks of them alone.</p>
<div class="pictures${data.dimensions < 3 ? ' two' : ''}">${drawTrackFigures(context)}${drawVisitFigures(context)}</div>`;
  return { id: 'recorded', title: 'What was recorded', body };
}

function shareInside(region: PageContext['fit']['visited']): number {
  let inside = 0;
  let total = 0;
  for (const count of region.counts) {
    total += count;
    if (count >= region.threshold) inside += count;
  }
  return total === 0 ? 0 : inside / total;
}

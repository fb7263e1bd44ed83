/** The calibrated scenario: what would run if someone took it from here. */

import { formatCount, formatNumber, formatPercent, formatQuantity } from '../format.js';
import { html, tameText } from '../html.js';
import type { PageContext, Section } from './Section.js';

const KINDS: Readonly<Record<string, string>> = {
  open: 'open',
  periodic: 'periodic',
  walls: 'reflecting walls',
  hold: 'the coefficients keep the value of the edge',
  fade: 'the coefficients fade to their mean',
  confine: 'the coefficients keep the value of the edge, and a force leads back inside',
};

export function writeScenario(context: PageContext): Section | null {
  const { scenario, units, coordinates } = context;
  if (!scenario) return null;
  const { observation } = scenario;
  const axes = scenario.axes.map((axis, i) => {
    const ends =
      axis.low === null || axis.high === null
        ? ''
        : ` from ${formatNumber(axis.low)} to ${formatQuantity(axis.high, 'position', units)}`;
    return `${coordinates[i] ?? ''}: ${KINDS[axis.kind] ?? axis.kind}${ends}`;
  });
  const rows: [string, string][] = [
    ['Title', scenario.title === '' ? 'none' : tameText(scenario.title, 200)],
    ['Order', scenario.order === 'first' ? `first, drift in the ${scenario.reading} reading` : 'second'],
    ['Domain', axes.join('; ')],
    ['Outside the visited region', KINDS[scenario.continuation.kind] ?? scenario.continuation.kind],
    [
      'Start',
      `${scenario.start.kind}${scenario.start.points.length > 0 ? `, ${formatCount(scenario.start.points.length)} points` : ''}`,
    ],
    [
      'Observation',
      `${formatCount(observation.tracks)} tracks of ${formatCount(observation.frames)} frames, every ${formatQuantity(observation.interval, 'time', units)}`,
    ],
    [
      'Localization error',
      observation.localizationError.map((error) => formatQuantity(error, 'position', units)).join(', '),
    ],
    ['Lost frames', formatPercent(observation.lostFrames)],
    ['Coefficient draws', scenario.ensemble === null ? 'none' : formatCount(scenario.ensemble.draws.length)],
    ...Object.entries(scenario.parameters).map(([name, value]): [string, string] => [
      `Parameter ${tameText(name, 40)}`,
      formatNumber(value, 5),
    ]),
  ];
  const conditions = scenario.warnings;
  const body = html`<dl class="settings">${rows.map(([name, value]) => html`<div><dt>${name}</dt><dd>${value}</dd></div>`)}</dl>
${conditions.length > 0 ? html`<h3>Standing conditions</h3><ul class="notes">${conditions.map((warning) => html`<li>${tameText(warning.message, 600)}<span class="tag">${tameText(warning.code, 60)}</span></li>`)}</ul>` : null}`;
  return { id: 'scenario', title: 'The scenario', body };
}

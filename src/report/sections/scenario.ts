/** The calibrated scenario: what would run if someone took it from here, and whether it settles down. */

import type { Scenario } from '../../documents/Scenario.js';
import type { Units } from '../../units.js';
import {
  formatCount,
  formatInterval,
  formatNumber,
  formatPercent,
  formatQuantity,
  formatSetting,
  joinUnit,
  tameUnits,
} from '../format.js';
import { type Html, html, tameText } from '../html.js';
import { capitalize, type PageContext, saySentence, type Section } from './Section.js';
import { writeList } from './settingList.js';
import { writeWarnings } from './warnings.js';

const KINDS: Readonly<Record<string, string>> = {
  open: 'open',
  periodic: 'periodic',
  walls: 'reflecting walls',
  hold: 'the coefficients keep the value of the edge',
  fade: 'the coefficients fade to constants',
  confine: 'the coefficients keep the value of the edge, and a force leads back inside',
  points: 'drawn from listed places',
  normal: 'drawn from a normal law',
  uniform: 'drawn evenly from a box',
};
const say = (kind: string) => KINDS[kind] ?? tameText(kind, 40);

/** A length or time that was chosen, with its unit. */
function formatChosen(value: number, quantity: 'position' | 'time', units: Units): string {
  return joinUnit(formatSetting(value), quantity, units);
}

function listFacts(scenario: Scenario, coordinates: readonly string[]): [string, string][] {
  const { observation, start } = scenario;
  const units = tameUnits(scenario.units);
  const axes = scenario.axes.map((axis, i) => {
    const ends =
      axis.low === null || axis.high === null
        ? ''
        : ` from ${formatSetting(axis.low)} to ${formatChosen(axis.high, 'position', units)}`;
    return `${coordinates[i] ?? ['x', 'y', 'z'][i]}: ${say(axis.kind)}${ends}`;
  });
  const time = (value: number) => formatChosen(value, 'time', units);
  return [
    ['Title', scenario.title === '' ? 'none' : tameText(scenario.title, 200)],
    ['Order', scenario.order === 'first' ? `first, drift in the ${scenario.reading} reading` : 'second'],
    ['Domain', axes.join('; ')],
    ['Outside the visited region', say(scenario.continuation.kind)],
    [
      'Starts',
      `${say(start.kind)}${start.points.length > 0 ? ` (${formatCount(start.points.length)})` : ''}${start.warmUp > 0 ? `, after ${time(start.warmUp)} of warming up` : ''}`,
    ],
    [
      'Observation',
      `${formatCount(observation.tracks)} tracks of ${formatCount(observation.frames)} frames, every ${time(observation.interval)}`,
    ],
    [
      'Localization error',
      observation.localizationError.map((error) => formatQuantity(error, 'position', units)).join(', '),
    ],
    ['Exposure', `${formatPercent(observation.exposure)} of the interval`],
    ['Lost frames', formatPercent(observation.lostFrames)],
    [
      'Integration step',
      scenario.integration.step === null ? 'chosen when run' : time(scenario.integration.step),
    ],
    ['Coefficient draws', scenario.ensemble === null ? 'none' : formatCount(scenario.ensemble.draws.length)],
    ...Object.entries(scenario.parameters).map(([name, value]): [string, string] => [
      `Parameter ${tameText(name, 40)}`,
      formatNumber(value, 5),
    ]),
  ];
}

const VERDICTS = { holds: 'good', fails: 'bad', unknown: 'open' } as const;

/** Conditions of a stationary law one by one, and how fast it is approached. */
function drawStanding(scenario: Scenario): Html | null {
  const { standing } = scenario;
  if (standing === null) return null;
  const units = tameUnits(scenario.units);
  const open = standing.conditions.filter((condition) => condition.verdict !== 'holds').length;
  const verdict =
    open === 0
      ? html`<p class="verdict good">All conditions hold: run for long, the process settles on one stationary law, wherever it starts.</p>`
      : html`<p class="verdict bad">${open === 1 ? 'One condition does' : `${formatCount(open)} conditions do`} not hold for certain: a run longer than the recording may wander where nothing was measured.</p>`;
  const { relaxation } = standing;
  const pace =
    relaxation === null
      ? null
      : html`<p>${
          relaxation.time === null
            ? 'How fast it settles was not resolved.'
            : `Its slowest relaxation takes ${joinUnit(formatInterval(relaxation.time, relaxation.low, relaxation.high ?? Number.NaN), 'time', units)}.`
        } ${saySentence(tameText(relaxation.note, 400))}</p>`;
  return html`<h3>Standing conditions</h3>${verdict}<ul class="findings">${standing.conditions.map(
    (condition) =>
      html`<li class="${VERDICTS[condition.verdict]}"><span class="outcome">${condition.verdict}</span><div><p><strong>${capitalize(tameText(condition.title, 200))}.</strong> ${saySentence(tameText(condition.note, 600))}</p></div></li>`,
  )}</ul>${pace}`;
}

export function writeScenario(context: PageContext): Section | null {
  const { scenario } = context;
  if (!scenario) return null;
  const body = html`<p>The fitted model with the choices a simulation needs besides it, ready to be run and changed.</p>
${writeList(listFacts(scenario, context.coordinates))}
${drawStanding(scenario)}
${scenario.warnings.length > 0 ? html`<h3>Advice with the scenario</h3>${writeWarnings(scenario.warnings)}` : null}`;
  return { id: 'scenario', title: 'The scenario', body };
}

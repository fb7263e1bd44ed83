/** Summaries at the terminal: no wider than it is, without colours unless asked, and saying what was found. */

import picocolors from 'picocolors';
import stringWidth from 'string-width';
import { describe, expect, test } from 'vitest';
import {
  formatChallengeSummary,
  formatFitSummary,
  formatResimulationSummary,
  formatSurveySummary,
  formatTestSummary,
  PLAIN_STYLE,
  type SummaryStyle,
} from '../../src/report/terminal.js';
import { wrapText } from '../../src/report/terminal/layout.js';
import { beadFit, gelFit, stripeFit, tableFit } from '../pages/pageFits.js';
import { exampleChallenges, exampleResimulation, exampleTests } from '../pages/pageResults.js';

const survey = {
  ...tableFit().survey,
  units: { length: 'm', time: 's' },
  coordinates: ['x', 'y'],
  trackLengths: { least: 120, lowerQuartile: 400, median: 700, upperQuartile: 900, most: 2000 },
  visited: { cells: 576, visitedCells: 530 },
  warnings: [{ code: 'few-visits', message: 'few' }],
};

/** A name that is long, has markup, an escape sequence, wide letters and a turn of direction. */
const HOSTILE = `<b>"'\u001b[31mred\u202e細胞🐌👩‍🔬مسار${'m'.repeat(300)}`;

function withNames(name: string) {
  const fit = tableFit();
  return {
    fit: {
      ...fit,
      data: { ...fit.data, coordinates: [name, name], units: { length: name, time: name } },
    },
    survey: { ...survey, coordinates: [name, name], units: { length: name, time: name } },
    resimulation: {
      ...exampleResimulation(),
      statistics: exampleResimulation().statistics.map((statistic) => ({ ...statistic, title: name })),
      refit: exampleResimulation().refit.map((row) => ({ ...row, name })),
    },
    tests: exampleTests().map((one) => ({
      ...one,
      hypothesis: name,
      note: name,
      parameters: { [name]: { value: 1, low: 0.5, high: 2 } },
    })),
    challenges: exampleChallenges().map((check) => ({ ...check, name, note: name })),
  };
}

const named = withNames(HOSTILE);
const SUMMARIES: Readonly<Record<string, (style?: SummaryStyle) => string>> = {
  'a survey': (style) => formatSurveySummary(survey, style),
  'a survey of nothing': (style) => formatSurveySummary({}, style),
  'a fit in one dimension': (style) => formatFitSummary(beadFit(), style),
  'a fit in two dimensions': (style) => formatFitSummary(tableFit(), style),
  'a periodic fit': (style) => formatFitSummary(stripeFit(), style),
  'a fit in three dimensions': (style) => formatFitSummary(gelFit(), style),
  'a re-simulation': (style) => formatResimulationSummary(exampleResimulation(false), style),
  'a re-simulation without refit': (style) =>
    formatResimulationSummary({ ...exampleResimulation(), refit: [] }, style),
  tests: (style) => formatTestSummary(exampleTests(), style),
  challenges: (style) => formatChallengeSummary(exampleChallenges(), style),
  'a survey with strange names': (style) => formatSurveySummary(named.survey, style),
  'a fit with strange names': (style) => formatFitSummary(named.fit, style),
  'a re-simulation with strange names': (style) => formatResimulationSummary(named.resimulation, style),
  'tests with strange names': (style) => formatTestSummary(named.tests, style),
  'challenges with strange names': (style) => formatChallengeSummary(named.challenges, style),
};

describe.each(Object.entries(SUMMARIES))('%s', (_, format) => {
  test('keeps within the width, ends in one line feed, and has no colours of its own', () => {
    for (const width of [40, 60, 80, 100, 120]) {
      const text = format({ ...PLAIN_STYLE, width });
      for (const line of text.split('\n'))
        expect(stringWidth(line), `${width}: ${line}`).toBeLessThanOrEqual(width);
      expect(text).toMatch(/[^\n]\n$/);
      // no control characters, so no escape sequences either, and nothing that turns the direction of writing
      expect(text).not.toMatch(/[\u0000-\u0009\u000b-\u001f\u007f-\u009f\u202a-\u202e\u2066-\u2069]/);
      expect(text).not.toMatch(/NaN|undefined|\bnull\b/);
      expect(text).not.toMatch(/ \n/);
    }
  });

  test('with colours says the same', () => {
    const colors = picocolors.createColors(true);
    const text = format({ width: 100, colors });
    const escape = String.fromCharCode(27);
    expect(text).toContain(escape);
    expect(text.replaceAll(new RegExp(`${escape}\\[\\d+m`, 'g'), '')).toBe(format(PLAIN_STYLE));
  });
});

describe('what is said', () => {
  test('of a recording', () => {
    const text = formatSurveySummary(survey);
    expect(text).toContain('40 of 120 to 2\u202f000 positions');
    expect(text).toMatch(/interval +0\.05\u00a0s/);
    expect(text).toMatch(/relaxation time +0\.300 \(0\.279 to 0\.324\)\u00a0s, 6\.0 intervals/);
    expect(text).toMatch(/recommended order +second/);
    expect(text).toMatch(/visited +530 of 576 cells/);
    expect(text).toMatch(/warnings +1/);
    // the correlations fall: full blocks first, the lowest last
    expect(text).toMatch(/x\u00a00\.53\u00a0█+[▁-▇]*▁\u00a00\.01/);
  });

  test('of an interval without a unit, and of a velocity that is forgotten', () => {
    const text = formatSurveySummary({ tracks: 3, interval: 0.25, relaxationTime: null, warnings: [] });
    expect(text).toMatch(/interval +0\.25\n/);
    expect(text).toMatch(/relaxation time +not resolved/);
    expect(text).toMatch(/warnings +none/);
  });

  test('of a fit: value, interval, range, and the course along each axis', () => {
    const text = formatFitSummary(tableFit());
    const friction = text.split('\n').find((line) => line.includes('friction')) ?? '';
    expect(friction).toMatch(/friction +s⁻¹ +0\.627 \(0\.583 to 0\.675\) +0\.40 … 1\.01/);
    // friction bumps at x = 0.35 and does not vary along y
    expect(friction).toMatch(/▁+[▂-█]+▁+ +▄{12}$/);
    expect(text.replace(/\s+/g, ' ')).toContain('Visited: 536 of 576 cells');
    expect(formatFitSummary(beadFit())).toContain('drift in the Itô reading');
  });

  test('narrow terminals lose courses and ranges before values', () => {
    const text = formatFitSummary(tableFit(), { ...PLAIN_STYLE, width: 60 });
    expect(text).toContain('0.627 (0.583 to 0.675)');
    expect(text).not.toContain('along y  along');
    expect(text).not.toContain('▁');
  });

  test('of a re-simulation: the dot lies where the recorded value is', () => {
    const text = formatResimulationSummary(exampleResimulation(false), { ...PLAIN_STYLE, width: 120 });
    const line = (title: string) => text.split('\n').find((one) => one.includes(title)) ?? '';
    expect(line('Where positions are')).toMatch(/1\.00 +·+├─+●─+┤·+ +0\.810 +0\.20 … 1\.40/);
    expect(line('Mean squared displacement')).toMatch(/0\.050 +·*├─+┤·+● +2\.90/);
    expect(text).toContain('differ from the real one (p\u00a0=\u00a00.010)');
    expect(text).toContain('friction_xx');
  });

  test('of tests: verdict, p, note and parameters', () => {
    const text = formatTestSummary(exampleTests());
    expect(text).toContain('✗ Friction is the same everywhere: rejected (p\u00a0<\u00a00.001).');
    expect(text).toContain(
      '– Friction follows the law g0 + a*exp(-((x - 0.35)/0.22)^2/2): not rejected (p\u00a0=\u00a00.36).',
    );
    expect(text).toContain('g0 = 0.410 (0.370 to 0.450); a = 0.88 (0.71 to 1.05)');
    expect(text).toContain('Of 3 statements 2 are rejected.');
    expect(formatTestSummary(exampleTests().slice(2))).toContain('Nothing speaks against the statement.');
    expect(formatTestSummary(exampleTests().slice(0, 1))).toContain('The statement is rejected.');
  });

  test('of challenges: which assumptions hold, and what it means where one fails', () => {
    const text = formatChallengeSummary(exampleChallenges());
    expect(text).toContain('✓ The noise is Gaussian: holds (p\u00a0=\u00a00.61).');
    expect(text).toContain('✗ Friction does not depend on speed: fails (p\u00a0=\u00a00.002).');
    expect(text).toContain('The data contradict an assumption of the model');
    const standing = exampleChallenges().filter((check) => check.holds);
    expect(formatChallengeSummary(standing)).toContain('The model stands every challenge');
    expect(formatChallengeSummary([{ ...standing[0], p: null }])).toContain('(p\u00a0unknown)');
  });
});

describe('breaking lines', () => {
  test('between words where it can, inside where it must, never losing a letter', () => {
    expect(wrapText('one two three', 7)).toEqual(['one two', 'three']);
    expect(wrapText('abcdefgh', 3)).toEqual(['abc', 'def', 'gh']);
    expect(wrapText('', 10)).toEqual(['']);
    // wide letters take two columns, joined emoji stay together
    expect(wrapText('細胞の軌跡', 4)).toEqual(['細胞', 'の軌', '跡']);
    expect(wrapText('👩‍🔬👩‍🔬', 3)).toEqual(['👩‍🔬', '👩‍🔬']);
  });
});

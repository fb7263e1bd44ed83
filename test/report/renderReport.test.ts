/** The page as text: the story in its order, complete, closed to the outside, and the same every time. */

import { createHash } from 'node:crypto';
import { parseHTML } from 'linkedom';
import { beforeAll, describe, expect, test } from 'vitest';
import type { FitDocument } from '../../src/documents/FitDocument.js';
import { evaluateFit } from '../../src/uncertainty/evaluateFit.js';
import { type DrawnReport, drawReport, renderReport } from '../../src/report/renderReport.js';
import { beadFit, gelFit, stripeFit, tableFit } from '../pages/pageFits.js';
import {
  exampleChallenges,
  exampleResimulation,
  exampleScenario,
  exampleTests,
} from '../pages/pageResults.js';

/** Pages drawn once for all tests that only read them. */
const drawnPages = new Map<() => FitDocument, Promise<DrawnReport>>();
const drawOf = (makeFit: () => FitDocument): Promise<DrawnReport> => {
  const known = drawnPages.get(makeFit) ?? drawReport({ fit: makeFit() });
  drawnPages.set(makeFit, known);
  return known;
};

const everything = () => ({
  fit: tableFit(),
  resimulation: exampleResimulation(),
  tests: exampleTests(),
  challenges: exampleChallenges(),
  scenario: exampleScenario(),
});

/** The page without its pictures, whose parsing takes longer than all the rest; parsed once. */
const parsed = new Map<string, ReturnType<typeof parseHTML>['document']>();
const parse = (page: string) => {
  const words = page.replace(/<svg[\s\S]*?<\/svg>/g, '').replace(/ data-probes='[^']*'/g, '');
  const document = parsed.get(page) ?? parseHTML(words).document;
  parsed.set(page, document);
  return document;
};
const textOf = (page: string, selector = 'main') =>
  (parse(page).querySelector(selector)?.textContent ?? '').replace(/\s+/g, ' ');

/** What betrays a number that is none, outside style and script, with the words before it. */
const findNonsense = (page: string) => {
  const text = page.replace(/<(style|script)>[\s\S]*?<\/\1>/g, '');
  const betrayals = text.matchAll(/NaN|undefined|Infinity|\bnull\b|−0(?:\.0+)?(?![\d.])/g);
  return [...betrayals].map(({ index }) => text.slice(Math.max(0, index - 40), index + 12));
};

describe('the whole story', () => {
  let drawn: DrawnReport;
  beforeAll(async () => {
    drawn = await drawReport(everything());
  });

  test('goes in the order of a methods section', () => {
    const document = parse(drawn.page);
    const ids = [...document.querySelectorAll('section')].map((section) => section.id);
    expect(ids).toEqual([
      'recorded',
      'carries',
      'coefficients',
      'tests',
      'resimulation',
      'scenario',
      'settings',
      'cautions',
    ]);
    const links = [...document.querySelectorAll('nav a')].map((link) => link.getAttribute('href'));
    expect(links).toEqual(ids.map((id) => `#${id}`));
    const heads = [...document.querySelectorAll('#coefficients h3')].map((head) => head.textContent);
    expect(heads).toEqual(['Force', 'Circulation', 'Friction', 'Noise', 'Temperature']);
  });

  test('leaves out what was not asked for', async () => {
    const page = (await drawOf(beadFit)).page;
    for (const part of ['id="tests"', 'id="resimulation"', 'id="scenario"', 'Circulation'])
      expect(page.includes(part), part).toBe(false);
  });

  test('holds every setting, hash and seed', () => {
    const { fit, resimulation } = everything();
    const settings = textOf(drawn.page, '#settings');
    for (const source of fit.sources) expect(settings).toContain(source.sha256);
    expect(settings).toContain(`seed of the fit${fit.study.seed}`);
    expect(settings).toContain(`seed of the re-simulation${resimulation.seed}`);
    expect(settings).toContain(`replicates of the fit${fit.uncertainty.replicates.length}`);
    for (const [name, value] of Object.entries(fit.study)) {
      if (['drift', 'diffusion'].includes(name)) continue; // of the other order
      const words = name.replace(/([A-Z])/g, ' $1').toLowerCase();
      expect(settings, name).toContain(words);
      if (typeof value === 'string') expect(settings, name).toContain(`${words}${value}`);
    }
    expect(settings).toContain(fit.program);
    expect(settings).toContain('penalty0.013');
  });

  test('tells tests and challenges in sentences, with their p-values', () => {
    const told = textOf(drawn.page, '#tests');
    expect(told).toContain('Friction is the same everywhere.');
    expect(told).toContain('p < 0.001, statistic 183');
    expect(told).toContain('g0 = 0.410 (0.370 to 0.450)');
    expect(told).toContain('Friction follows the law g0 + a*exp(-((x - 0.35)/0.22)^2/2).');
    expect(told).toContain('g0*(1 + a*tanh(x/w))w = 3.00 (above 0.400)−812 ± 31worserejected, p < 0.001');
    expect(told).toContain(
      'The data contradict an assumption of the model: “Friction does not depend on speed”.',
    );
  });

  test('says what the re-simulation found, and the conditions of the scenario', async () => {
    expect(textOf(drawn.page, '#resimulation')).toContain('do not tell them apart (p = 0.37)');
    const inconsistent = await renderReport({ fit: tableFit(), resimulation: exampleResimulation(false) });
    expect(textOf(inconsistent, '#resimulation')).toContain('differ from the real one (p = 0.010)');
    const scenario = textOf(drawn.page, '#scenario');
    expect(scenario).toContain('Friction is positive and bounded away from zero.');
    expect(scenario).toContain('One condition does not hold for certain');
    expect(scenario).toContain('2.40 (2.10 to 2.80) s');
  });

  test('finds circulation where the force turns, and none where it has a potential', async () => {
    // F = (−0.9 x − 0.7 y, −0.9 y + 0.7 x): curl 1.4
    expect(textOf(drawn.page)).toContain('The force turns. Its curl can be told from zero in 100 %');
    expect(textOf(drawn.page)).toContain('reaches 1.40 s⁻²');
    expect(textOf((await drawOf(stripeFit)).page)).toContain('No circulation was found.');
  });

  test('names the reading of a drift, and the caution that goes with it', async () => {
    const first = textOf((await drawOf(beadFit)).page);
    expect(first).toContain('The drift is stated in the Itô reading.');
    expect(textOf(drawn.page)).not.toContain('Itô');
  });

  test('every axis has a unit', () => {
    const { document } = parseHTML(drawn.page);
    for (const plot of document.querySelectorAll('.plot')) {
      const labels = [...plot.querySelectorAll('text')]
        .map((text) => text.textContent ?? '')
        .filter((text) => /[a-z]{2}|^[xyz] /.test(text));
      // densities, correlations and counts have none of their own
      const bare = labels.filter(
        (text) => !/\(.+\)/.test(text) && !/share|density|correlation|positions|s⁻²/.test(text),
      );
      expect(bare, plot.getAttribute('aria-label') ?? '').toEqual([]);
    }
  });
});

describe('the page', () => {
  test('forbids everything but its own style and script', async () => {
    const page = (await drawOf(beadFit)).page;
    const hash = (text: string) => createHash('sha256').update(text).digest('base64');
    const style = /<style>([\s\S]*?)<\/style>/.exec(page)?.[1] ?? '';
    const script = /<script>([\s\S]*?)<\/script>/.exec(page)?.[1] ?? '';
    const policy = /http-equiv="Content-Security-Policy" content="([^"]*)"/.exec(page)?.[1] ?? '';
    expect(policy).toBe(
      `default-src 'none'; style-src 'sha256-${hash(style)}'; script-src 'sha256-${hash(script)}'; base-uri 'none'; form-action 'none'`,
    );
    expect(/\sstyle="|\son[a-z]+=/.test(page)).toBe(false);
  });

  test('names nothing outside itself', async () => {
    const { page } = await drawOf(tableFit);
    const addresses = [...page.matchAll(/\b(?:https?:)?\/\/[\w.]+[^"'\s]*/g)].map(([address]) => address);
    expect([...new Set(addresses)]).toEqual(['http://www.w3.org/2000/svg']);
    expect(/@import|url\((?!#)/.test(page)).toBe(false);
  });

  test('is the same for the same fit, and has no identifier twice', async () => {
    const [once, again] = [(await drawOf(beadFit)).page, await renderReport({ fit: beadFit() })];
    expect(again === once).toBe(true);
    const ids = [...once.matchAll(/\sid="([^"]*)"/g)].map((match) => match[1]);
    expect(new Set(ids).size).toBe(ids.length);
  });

  test('survives a fit that hardly saw anything', async () => {
    const fit = tableFit();
    const counts = fit.visited.counts.map(() => 0);
    const page = await renderReport({
      fit: {
        ...fit,
        sources: [],
        survey: {},
        diagnostics: {},
        trackSample: [],
        visited: { ...fit.visited, counts, threshold: 1 },
        uncertainty: { ...fit.uncertainty, replicates: fit.uncertainty.replicates.slice(0, 1) },
      },
    });
    expect(findNonsense(page)).toEqual([]);
    expect(textOf(page)).toContain('No cell was visited often enough');
  });

  test('shows no number that is none', async () => {
    for (const makeFit of [beadFit, tableFit, stripeFit, gelFit])
      expect(findNonsense((await drawOf(makeFit)).page)).toEqual([]);
  });
});

describe('the pictures behind it', () => {
  test('come with tables of equal columns and names of their own', async () => {
    for (const makeFit of [beadFit, tableFit, gelFit]) {
      const { figures } = await drawOf(makeFit);
      expect(new Set(figures.map((figure) => figure.name)).size).toBe(figures.length);
      for (const { name, table } of figures) {
        expect(name).toMatch(/^[a-z0-9]+(-[a-z0-9]+)*$/);
        expect(new Set(table.map((column) => column.values.length)).size, name).toBe(1);
        expect(new Set(table.map((column) => column.name)).size, name).toBe(table.length);
      }
    }
  });

  test('hold the numbers that `evaluate` gives at the same places', async () => {
    const fit = tableFit();
    const { figures } = await drawOf(tableFit);
    const map = figures.find((figure) => figure.name === 'friction-xx-map-xy');
    const column = (name: string) => Array.from(map?.table.find((one) => one.name === name)?.values ?? []);
    const [x, y] = [column('x'), column('y')].map((values) => values.map(Number));
    const places = Float64Array.from(x.flatMap((value, i) => [value, y[i]]));
    const expected = evaluateFit(fit, places).columns.find((one) => one.name === 'friction_xx');
    expect(x).toHaveLength(576);
    expect(column('friction_xx')).toEqual(Array.from(expected?.values ?? []));
    expect(column('friction_xx_low')).toEqual(Array.from(expected?.low ?? []));
    expect(column('friction_xx_high')).toEqual(Array.from(expected?.high ?? []));
  });
});

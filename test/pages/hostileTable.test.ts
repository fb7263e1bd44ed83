/** A table whose names mean harm, from reading to the page: the same numbers, and a page that does nothing. */

import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { formatTrackTable } from '../../src/import/formatTracks.js';
import { simulateSecondOrder } from '../support/exactProcesses.js';
import { Workplace } from '../cli/runInProcess.js';
import { findTextTrouble, HAS_BROWSER, openBrowser, WHY_SKIPPED } from './browser.js';

const place = new Workplace();
afterAll(() => place.remove());

const TRACK_NAMES = [
  '<script>window.broken = 1</script>',
  '"><img src=x onerror=window.broken=1>',
  "' onfocus='window.broken=1' autofocus tabindex='0",
  '</svg></style><iframe src="https://example.org/">',
  ']]> --> */ {{7*7}} ${7*7} javascript:window.broken=1',
  '=HYPERLINK("https://example.org/")',
  'm'.repeat(700),
  'مسار الخلية في الهلام',
  '\u202Eبالعكس\u2066 back\u202C',
  '👩‍🔬🐌🇪🇺 細胞',
];

/** Column and file names; what comes after `=` and before the next role is all name. */
const COLUMNS = {
  track: '<svg onload=window.broken=1>',
  time: `t" style="position:fixed;inset:0`,
  x: 'العمود 👾 <b>x</b>',
  y: `y' ${'w'.repeat(400)}`,
};
const FILE = `<img src=q onerror=window.broken=1> ${'n'.repeat(150)}.csv`;

const quote = (cell: string): string => `"${cell.replaceAll('"', '""')}"`;
const readJson = (name: string): { model: unknown; uncertainty: unknown } =>
  JSON.parse(readFileSync(join(place.path, name), 'utf8')) as { model: unknown; uncertainty: unknown };

const FIT = ['--force', 'linear', '--friction', 'constant', '--noise', 'constant', '--replicates', '40'];

beforeAll(async () => {
  const tracks = simulateSecondOrder({
    tracks: TRACK_NAMES.length,
    frames: 260, // 2600 positions: enough stretches for theory, so that the test of a law needs no simulations
    interval: 0.2,
    dimensions: 2,
    friction: 1,
    stiffness: 0.5,
    localizationError: 0.01,
    seed: 8,
  });
  const plain = [...formatTrackTable(tracks)].join('');
  const [, ...rows] = plain.trimEnd().split('\n');
  const hostile = rows.map((row) => {
    const [track, ...numbers] = row.split(',');
    const index = tracks.trackNames.indexOf(track);
    return [quote(TRACK_NAMES[index]), ...numbers].join(',');
  });
  const header = Object.values(COLUMNS).map(quote).join(',');
  place.write('plain.csv', plain);
  place.write(FILE, `${[header, ...hostile].join('\n')}\n`);

  const run = async (argv: readonly string[]): Promise<void> => {
    const { status, stderr } = await place.run(argv);
    expect(status, stderr).toBe(0);
  };
  const columns = Object.entries(COLUMNS)
    .map(([role, name]) => `${role}=${name}`)
    .join(',');
  await run(['fit', 'plain.csv', ...FIT, '-o', 'plain.json']);
  await run(['fit', FILE, '--columns', columns, '--units', '<i>m</i>,"s"', ...FIT, '-o', 'fit.json']);
  await run(['challenge', 'fit.json', '-o', 'challenge.json']);
  await run([
    ...['resimulate', 'fit.json', '--replicates', '19', '--no-refit', '--workers', '1'],
    ...['-o', 'resimulation.json'],
  ]);
  await run(['scenario', 'fit.json', '--title', TRACK_NAMES[0], '-o', 'scenario.json']);
  const law = 'g0*(1+a*tanh(x))';
  await run(['test', 'fit.json', '--field', 'friction', '--law', law, '-o', 'test.json']);
  await run([
    ...['report', 'fit.json', '--challenges', 'challenge.json', '--resimulation', 'resimulation.json'],
    ...['--scenario', 'scenario.json', '--tests', 'test.json', '-o', 'report.html'],
  ]);
}, 300_000);

describe('a hostile table', () => {
  it('gives the numbers of a harmless one', () => {
    const [hostile, plain] = [readJson('fit.json'), readJson('plain.json')];
    expect(hostile.model).toEqual(plain.model);
    expect(hostile.uncertainty).toEqual(plain.uncertainty);
  });

  describe.skipIf(!HAS_BROWSER)(`gives a page${WHY_SKIPPED}`, () => {
    let browser: Browser;
    let page: Page;
    const complaints: string[] = [];
    const requests: string[] = [];
    beforeAll(async () => {
      browser = await openBrowser();
      page = await browser.newPage({ viewport: { width: 1280, height: 900 } });
      page.on('console', (message) => complaints.push(message.text()));
      page.on('pageerror', (error) => complaints.push(String(error)));
      page.on('request', (request) => requests.push(request.url()));
      await page.goto(`file://${join(place.path, 'report.html')}`);
    });
    afterAll(() => browser.close());

    it('that does nothing, whatever is pointed at or focused', async () => {
      for (const plot of await page.locator('.plot[data-probes]:visible').all()) {
        await plot.hover();
        await plot.focus();
      }
      expect(await page.evaluate('window.broken')).toBeUndefined();
      expect(
        await page.evaluate(
          `document.querySelectorAll('img, iframe, b, i, u, [onload], [onerror], [onfocus], [autofocus]').length`,
        ),
      ).toBe(0);
      expect(await page.evaluate(`document.querySelectorAll('script').length`)).toBe(1);
      expect(requests).toHaveLength(1);
      expect(complaints).toEqual([]);
    });

    it('that shows the names as text', async () => {
      const text = await page.evaluate<string>('document.body.textContent');
      expect(text).toContain('<img src=q onerror=window.broken=1>'); // the file
      expect(text).toContain('<svg onload=window.broken=1>'); // the column
      expect(text).toContain('<script>window.broken = 1</script>'); // the title
    });

    it('that keeps every text in its place', async () => {
      await page.evaluate(`for (const details of document.querySelectorAll('details')) details.open = true`);
      for (const width of [1280, 420]) {
        await page.setViewportSize({ width, height: 900 });
        expect(await findTextTrouble(page), `at ${width} px`).toEqual([]);
      }
    });
  });
});

/** Pages in a browser: nothing missing, nothing asked of the outside, readable, and values at the pointer. */

import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { ReportInput } from '../../src/report/ReportInput.js';
import { renderReport } from '../../src/report/renderReport.js';
import {
  countTexts,
  findFaintTexts,
  findTextTrouble,
  HAS_BROWSER,
  openBrowser,
  WHY_SKIPPED,
} from './browser.js';
import { beadFit, gelFit, stripeFit, tableFit } from './pageFits.js';
import { exampleChallenges, exampleResimulation, exampleScenario, exampleTests } from './pageResults.js';

const INPUTS: Readonly<Record<string, () => ReportInput>> = {
  'one dimension, first order': () => ({ fit: beadFit() }),
  'two dimensions, second order, with every result': () => ({
    fit: tableFit(),
    resimulation: exampleResimulation(),
    tests: exampleTests(),
    challenges: exampleChallenges(),
    scenario: exampleScenario(),
  }),
  'two dimensions, periodic, inconsistent': () => ({
    fit: stripeFit(),
    resimulation: exampleResimulation(false),
  }),
  'three dimensions': () => ({ fit: gelFit() }),
};

describe.skipIf(!HAS_BROWSER)(`pages in a browser${WHY_SKIPPED}`, () => {
  const directory = mkdtempSync(join(tmpdir(), 'wanderlaw-pages-'));
  let browser: Browser;
  let page: Page;
  const complaints: string[] = [];
  const requests: string[] = [];

  beforeAll(async () => {
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1280, height: 900 } });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') complaints.push(message.text());
    });
    page.on('pageerror', (error) => complaints.push(String(error)));
    page.on('request', (request) => requests.push(request.url()));
  });
  afterAll(async () => {
    await browser?.close();
    rmSync(directory, { recursive: true, force: true });
  });

  const show = async (text: string): Promise<string> => {
    const file = join(directory, 'report.html');
    writeFileSync(file, text);
    complaints.length = 0;
    requests.length = 0;
    await page.emulateMedia({ media: null, colorScheme: 'light' });
    await page.setViewportSize({ width: 1280, height: 900 });
    await page.goto(`file://${file}`);
    return `file://${file}`;
  };

  describe.each(Object.entries(INPUTS))('%s', (name, makeInput) => {
    let text = '';
    let address = '';
    let [rendered, loaded] = [0, 0];

    beforeAll(async () => {
      const input = makeInput();
      const start = performance.now();
      text = await renderReport(input);
      rendered = performance.now() - start;
      address = await show(text);
      loaded = performance.now() - start - rendered;
    });

    test('asks for nothing but itself and complains of nothing', () => {
      expect(requests).toEqual([address]);
      expect(complaints).toEqual([]);
    });

    test('is below 2 MB', () => {
      const size = Buffer.byteLength(text);
      console.log(
        `page of ${name}: ${Math.round(size / 1024)} kB, written in ${Math.round(rendered)} ms, shown in ${Math.round(loaded)} ms`,
      );
      expect(size).toBeLessThan(2_000_000);
    });

    test('has no text on text, cut off or beyond the edge, broad, narrow and on paper', async () => {
      await page.evaluate(`for (const details of document.querySelectorAll('details')) details.open = true`);
      for (const width of [1280, 420]) {
        await page.setViewportSize({ width, height: 900 });
        expect(await countTexts(page)).toBeGreaterThan(100);
        expect(await findTextTrouble(page), `at ${width} px`).toEqual([]);
      }
      await page.emulateMedia({ media: 'print' });
      await page.setViewportSize({ width: 720, height: 1000 });
      expect(await findTextTrouble(page), 'on paper').toEqual([]);
    });

    test('has the contrast of WCAG AA in light and dark', async () => {
      for (const colorScheme of ['light', 'dark'] as const) {
        await page.emulateMedia({ media: 'screen', colorScheme });
        await page.setViewportSize({ width: 1280, height: 900 });
        expect(await findFaintTexts(page), colorScheme).toEqual([]);
      }
    });
  });

  describe('values at a place', () => {
    beforeAll(async () => {
      await show(await renderReport({ fit: beadFit() }));
    });
    const read = () => page.locator('#diffusion ~ .duo .plot.broad output').first().textContent();
    const plot = () => page.locator('#diffusion ~ .duo .plot.broad').first();
    const place = (said: string | null) => Number(/= ([\d.]+)/.exec(said ?? '')?.[1]);

    test('are said under the mouse, and fall silent when it leaves', async () => {
      await plot().scrollIntoViewIfNeeded();
      const box = await plot().boundingBox();
      if (!box) throw new Error('the picture is not shown');
      // Drawing units run from the left edge; the axis spans 0.6 to 8 µm between margins of 52 and 16 of 580.
      const at = (micrometres: number) =>
        box.x + (box.width * (52 + ((micrometres - 0.6) / 7.4) * (580 - 68))) / 580;
      await page.mouse.move(at(3), box.y + box.height / 2);
      const said = await read();
      expect(said).toMatch(/^x = .* × 10⁻⁶: .* \(.* to .*\) × 10⁻¹³\sm²\ss⁻¹$/);
      // probes are 7.4/128 µm apart, and stand on whole drawing units (7.4/512 µm)
      expect(Math.abs(place(said) - 3)).toBeLessThan(7.4 / 256 + 7.4 / 512 + 0.006);
      const box2 = await page.locator('#diffusion ~ .duo .plot.broad output').first().boundingBox();
      expect(box2 && box2.x >= box.x - 1 && box2.x + box2.width <= box.x + box.width + 1).toBe(true);
      await page.mouse.move(5, 5);
      expect(await read()).toBe('');
    });

    test('are said on the keyboard: arrows walk, Escape leaves', async () => {
      await plot().focus();
      const middle = place(await read());
      await page.keyboard.press('ArrowRight');
      const right = place(await read());
      await page.keyboard.press('ArrowLeft');
      await page.keyboard.press('ArrowLeft');
      const left = place(await read());
      expect(right).toBeGreaterThan(middle);
      expect(left).toBeLessThan(middle);
      await page.keyboard.press('Escape');
      expect(await read()).toBe('');
    });

    test('every picture with values can be reached with the tab key', async () => {
      const [reachable, all] = await page.evaluate<[number, number]>(`(() => {
        const plots = [...document.querySelectorAll('.plot[data-probes]')];
        return [plots.filter((plot) => plot.tabIndex === 0 && plot.getAttribute('aria-label')).length, plots.length];
      })()`);
      expect(all).toBeGreaterThan(4);
      expect(reachable).toBe(all);
    });

    test('walk up and down in a map', async () => {
      await show(await renderReport({ fit: tableFit() }));
      const map = page.locator('.plot[aria-label="Map of friction over x and y"]');
      await map.focus();
      const places = async () => {
        const said = (await map.locator('output').textContent()) ?? '';
        return [...said.matchAll(/[xy] = (−?[\d.]+)/g)].map((match) => Number(match[1].replace('−', '-')));
      };
      const [x, y] = await places();
      await page.keyboard.press('ArrowUp');
      const [upX, upY] = await places();
      // cells are 1.7/24 high; values are written to three digits
      expect(upX).toBe(x);
      expect(upY - y).toBeCloseTo(1.7 / 24, 2);
    });
  });

  describe('names from the user’s files', () => {
    const withNames = (name: string, coordinates: string[], units: { length: string; time: string }) => {
      const fit = tableFit();
      return {
        fit: {
          ...fit,
          program: name,
          sources: [{ path: `dir/${name.replaceAll('/', '')}`, sha256: name }],
          data: { ...fit.data, coordinates, units },
          trackSample: fit.trackSample.map((track) => ({ ...track, name })),
          warnings: [{ code: name, message: name }],
        },
        resimulation: exampleResimulation(),
        tests: [
          {
            ...exampleTests()[0],
            hypothesis: name,
            note: name,
            parameters: { [name]: { value: 1, low: 0, high: 2 } },
          },
        ],
        challenges: [{ ...exampleChallenges()[0], name, note: name }],
        scenario: { ...exampleScenario(), title: name, warnings: [{ code: name, message: name }] },
      };
    };

    test('do nothing, whatever they say', async () => {
      const hostile = `</script><script>window.broken = 1</script><img src=x onerror="window.broken = 1">' onfocus='window.broken = 1`;
      await show(
        await renderReport(
          withNames(hostile, [hostile, "y' autofocus x='"], { length: hostile, time: '"><b>' }),
        ),
      );
      await page.locator('.plot[data-probes]').nth(2).hover();
      expect(await page.evaluate('window.broken')).toBeUndefined();
      expect(
        await page.evaluate(`document.querySelectorAll('img, b, [onerror], [onfocus], [autofocus]').length`),
      ).toBe(0);
      expect(await page.evaluate(`document.querySelectorAll('script').length`)).toBe(1);
      expect(requests).toHaveLength(1);
      expect(complaints).toEqual([]);
    });

    test('keep their place, however long and in whatever letters', async () => {
      const names = ['m'.repeat(600), 'مسارات الخلايا في الهلام 🐌👩‍🔬🇪🇺細胞の軌跡 '.repeat(20)];
      for (const name of names) {
        const coordinates = [name, `${name}y`];
        await show(await renderReport(withNames(name, coordinates, { length: name, time: name })));
        for (const width of [1280, 420]) {
          await page.setViewportSize({ width, height: 900 });
          expect(await findTextTrouble(page), `${name.slice(0, 10)} at ${width} px`).toEqual([]);
        }
      }
    });
  });

  test('the checks themselves see overlapping, cut off, protruding and faint texts', async () => {
    await page.goto('about:blank');
    await page.setViewportSize({ width: 400, height: 400 });
    await page.setContent(`<!doctype html><body style="margin: 0; background: #fff">
      <p style="position: absolute; top: 10px; left: 10px">one upon</p><p style="position: absolute; top: 14px; left: 20px">another</p>
      <p style="position: absolute; top: 80px; left: 300px; width: 300px">beyond the edge of the page</p>
      <p style="position: absolute; top: 160px; width: 30px; height: 10px; overflow: hidden">cutting</p>
      <p style="position: absolute; top: 240px; color: #999">faint</p></body>`);
    const trouble = (await findTextTrouble(page)).join('\n');
    for (const word of ['overlap: one upon | another', 'sticks out: beyond', 'sideways', 'cut off'])
      expect(trouble).toContain(word);
    // #999 on white: (1 + 0.05)/(0.3185 + 0.05) = 2.85
    expect(await findFaintTexts(page)).toEqual(['2.85: faint']);
  });
});

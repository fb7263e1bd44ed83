/**
 * The demos, as README shows them, and the pages a newcomer sees first: every section, nothing asked of the outside,
 * readable broad and narrow, values at the pointer.
 */

import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Browser, Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { DATA_SETS } from '../../src/cli/commandTable.js';
import { Workplace } from '../cli/runInProcess.js';
import { findFaintTexts, findTextTrouble, HAS_BROWSER, openBrowser, WHY_SKIPPED } from './browser.js';

const FILES = [
  'survey.json',
  'fit.json',
  'tests.json',
  'challenge.json',
  'resimulation.json',
  'scenario.json',
  'report.html',
];

/** Statements whose truth is known from datasets/truth.ts, with the verdict they deserve. */
const VERDICTS: Readonly<Record<(typeof DATA_SETS)[number], Readonly<Record<string, boolean>>>> = {
  'felt-table': { 'uniform-friction': true, 'conservative-force': true }, // a felt strip, and a stirring force
  'settling-beads': { 'uniform-noise': true, 'zero-force': true }, // hindered near the floor, under gravity
  // Stripes of friction, and a force across them that has a potential.
  'stripe-cells': { 'uniform-friction': true, 'conservative-force': false },
};

describe.each(DATA_SETS)('demo %s', (name) => {
  const place = new Workplace();
  const read = (file: string): string => readFileSync(join(place.path, 'out', name, file), 'utf8');
  let browser: Browser | null = null;
  let page: Page;
  const complaints: string[] = [];
  const requests: string[] = [];

  beforeAll(async () => {
    const { status, stdout, stderr } = await place.run(['demo', name]);
    expect([status, stderr]).toEqual([0, '']);
    for (const file of FILES) {
      expect(stdout).toContain(join('out', name, file));
      expect(existsSync(join(place.path, 'out', name, file)), file).toBe(true);
    }
    expect(place.list()).toEqual(['out']);
    if (!HAS_BROWSER) return;
    browser = await openBrowser();
    page = await browser.newPage({ viewport: { width: 1280, height: 900 } });
    page.on('console', (message) => {
      if (message.type() === 'error' || message.type() === 'warning') complaints.push(message.text());
    });
    page.on('pageerror', (error) => complaints.push(String(error)));
    page.on('request', (request) => requests.push(request.url()));
    await page.goto(`file://${join(place.path, 'out', name, 'report.html')}`);
  }, 600_000);
  afterAll(async () => {
    await browser?.close();
    place.remove();
  });

  it('comes to the verdicts that the truth deserves, and to a page with every section', () => {
    const tests = JSON.parse(read('tests.json')) as { hypothesis: string; rejected: boolean }[];
    expect(tests).toHaveLength(2);
    expect(Object.fromEntries(tests.map(({ hypothesis, rejected }) => [hypothesis, rejected]))).toMatchObject(
      VERDICTS[name],
    );
    const text = read('report.html');
    const sections = ['recorded', 'carries', 'coefficients', 'tests', 'resimulation', 'scenario', 'settings'];
    for (const section of sections) expect(text).toContain(`<section id="${section}">`);
    expect(Buffer.byteLength(text)).toBeLessThan(2_000_000);
  });

  describe.skipIf(!HAS_BROWSER)(`its page in a browser${WHY_SKIPPED}`, () => {
    it('asks for nothing but itself and complains of nothing', () => {
      expect(requests).toHaveLength(1);
      expect(complaints).toEqual([]);
    });

    it('has no text on text or cut off, and the contrast of WCAG AA', async () => {
      for (const width of [1280, 420]) {
        await page.setViewportSize({ width, height: 900 });
        expect(await findTextTrouble(page), `at ${width} px`).toEqual([]);
      }
      for (const colorScheme of ['light', 'dark'] as const) {
        await page.emulateMedia({ colorScheme });
        expect(await findFaintTexts(page), colorScheme).toEqual([]);
      }
    });

    it('says values under the mouse and on the keyboard', async () => {
      await page.setViewportSize({ width: 1280, height: 900 });
      const plot = page.locator('#coefficients .plot[data-probes]:visible').first();
      const said = (): Promise<string | null> => plot.locator('output').textContent();
      await plot.hover();
      expect(await said()).toMatch(/^[xy] = .*: /);
      await page.mouse.move(5, 5);
      expect(await said()).toBe('');
      await plot.focus();
      const first = await said();
      await page.keyboard.press('ArrowRight');
      expect(await said()).toMatch(/^[xy] = /);
      expect(await said()).not.toBe(first);
    });
  });
});

/** Figures as files: SVG that stands alone, and PNG of the same. */

import { describe, expect, test } from 'vitest';
import type { Figure } from '../../src/report/figure.js';
import { composeFigure, openPngRenderer } from '../../src/report/figureFile.js';
import { drawReport } from '../../src/report/renderReport.js';
import { gelFit, tableFit } from '../pages/pageFits.js';
import { exampleResimulation } from '../pages/pageResults.js';

/** Width and height in the header of a PNG; throws where it is none. */
function readPngSize(bytes: Uint8Array): { width: number; height: number } {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  expect(Array.from(bytes.subarray(0, 8))).toEqual([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a]);
  return { width: view.getUint32(16), height: view.getUint32(20) };
}

const readSvgSize = (svg: string) => {
  const [, width, height] = /^<svg [^>]*width="(\d+)" height="(\d+)"/.exec(svg) ?? [];
  return { width: Number(width), height: Number(height) };
};

describe('figures as files', () => {
  test('stand alone: colours resolved, heading and key inside, nothing asked for outside', async () => {
    const { figures } = await drawReport({ fit: tableFit(), resimulation: exampleResimulation() });
    expect(figures.length).toBeGreaterThan(20);
    for (const figure of figures) {
      const svg = composeFigure(figure);
      expect(svg).not.toMatch(/var\(--|&nbsp;|<script|<style|href=/);
      for (const [, id] of svg.matchAll(/url\(#([\w-]+)\)/g)) expect(svg).toContain(`id="${id}"`);
      for (const part of figure.legend) if ('text' in part) expect(svg).toContain(part.text);
    }
    const along = figures.find((figure) => figure.name === 'friction-xx-along-x');
    expect(composeFigure(along as Figure)).toContain('Friction along x, at y');
  });

  test('are drawn as PNG of three times the size, the same every time, text included', async () => {
    const drawPng = await openPngRenderer();
    const { figures } = await drawReport({ fit: gelFit() });
    const some = figures.filter((_, i) => i % 6 === 0);
    for (const figure of some) {
      const svg = composeFigure(figure);
      const png = drawPng(svg);
      const { width, height } = readSvgSize(svg);
      expect(readPngSize(png)).toEqual({ width: 3 * width, height: 3 * height });
      expect(Buffer.compare(png, drawPng(svg))).toBe(0);
    }
    // The letters leave a mark: without them the picture is another.
    const svg = composeFigure(some[0]);
    expect(Buffer.compare(drawPng(svg), drawPng(svg.replace(/<text[^>]*>[^<]*<\/text>/g, '')))).not.toBe(0);
  });

  test('take any name: markup stays text, and the file is still well-formed', async () => {
    const drawPng = await openPngRenderer();
    const { figures } = await drawReport({ fit: tableFit() });
    for (const title of ['</text><script>', '"\'&&amp;<b', 'مسار 🐌 細胞', 'm'.repeat(500), '']) {
      const svg = composeFigure({
        ...figures[0],
        title,
        note: title,
        legend: [{ sample: 'line', text: title }],
      });
      expect(svg).not.toContain('<script');
      expect(readPngSize(drawPng(svg)).width).toBe(3 * readSvgSize(svg).width);
    }
  });
});

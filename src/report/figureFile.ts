/** A picture as a file of its own: heading, key and chart in one SVG that needs no page, and the same as PNG. */

import { guessTextWidth } from './charts/Drawing.js';
import { SHARED_FILLS } from './charts/fills.js';
import type { Figure } from './figure.js';
import { escapeHtml } from './html.js';
import { drawLegend } from './legend.js';
import { LIGHT, resolveColours } from './palette.js';

const MARGIN = 14;
const TITLE_SIZE = 15;
const NOTE_SIZE = 12;
const FONTS = 'DejaVu Sans, Liberation Sans, Arial, sans-serif';

/** Breaks a text into lines that fit a width. */
function breakLines(text: string, fontSize: number, width: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(' ').filter(Boolean)) {
    const last = lines.at(-1);
    const longer = `${last ?? ''} ${word}`;
    if (last === undefined || guessTextWidth(longer, fontSize) > width) lines.push(word);
    else lines[lines.length - 1] = longer;
  }
  return lines;
}

/** Width and height of a chart, from its viewBox. */
function readSize(svg: string): { width: number; height: number } {
  const [, , width = 0, height = 0] = (/viewBox="([^"]*)"/.exec(svg)?.[1] ?? '').split(/[\s,]+/).map(Number);
  return { width, height };
}

/**
 * A complete SVG document in the light colours, without references to anything outside.
 *
 * @example
 * const { figures } = await drawReport({ fit });
 * console.log(composeFigure(figures[0]).slice(0, 4)); // → <svg
 */
export function composeFigure(figure: Figure): string {
  const chart = readSize(figure.chart.svg);
  const width = chart.width + 2 * MARGIN;
  let y = MARGIN;
  const write = (text: string, size: number, more: string) => {
    y += size * 1.35;
    return `<text x="${MARGIN}" y="${(y - 0.3 * size).toFixed(1)}" font-size="${size}" fill="currentColor" ${more}>${escapeHtml(text)}</text>`;
  };
  const head = [
    ...breakLines(figure.title, TITLE_SIZE, chart.width).map((line) =>
      write(line, TITLE_SIZE, 'font-weight="bold"'),
    ),
    ...breakLines(figure.note, NOTE_SIZE, chart.width).map((line) => write(line, NOTE_SIZE, '')),
  ];
  y += 4;
  const legend = drawLegend(figure.legend, chart.width);
  const key = `<g transform="translate(${MARGIN},${y.toFixed(1)})">${legend.svg}</g>`;
  y += legend.height;
  const picture = figure.chart.svg.replace(
    /^<svg/,
    `<svg x="${MARGIN}" y="${y.toFixed(1)}" width="${chart.width}" height="${chart.height}" overflow="visible"`,
  );
  const height = Math.ceil(y + chart.height + MARGIN);
  const text = `<svg xmlns="http://www.w3.org/2000/svg" width="${width}" height="${height}" viewBox="0 0 ${width} ${height}" font-family="${FONTS}" color="var(--ink)">${SHARED_FILLS}<rect width="${width}" height="${height}" fill="#ffffff"/>${head.join('')}${key}${picture}</svg>\n`;
  return resolveColours(text, LIGHT).replaceAll('&nbsp;', '&#160;');
}

/** Pixels per drawing unit: sharp on paper at the size of a column, and on a screen across a room. */
const PNG_SCALE = 3;

/**
 * The SVG as PNG, with the fonts of a package instead of those of the machine, so that the same figure gives the same
 * picture everywhere. The renderer is loaded when the first picture is drawn.
 */
export async function openPngRenderer(): Promise<(svg: string) => Uint8Array> {
  const [{ Resvg }, { createRequire }] = await Promise.all([
    import('@resvg/resvg-js'),
    import('node:module'),
  ]);
  const { resolve } = createRequire(import.meta.url);
  const fontFiles = ['DejaVuSans.ttf', 'DejaVuSans-Bold.ttf'].map((file) =>
    resolve(`dejavu-fonts-ttf/ttf/${file}`),
  );
  const font = {
    loadSystemFonts: false,
    fontFiles,
    defaultFontFamily: 'DejaVu Sans',
    sansSerifFamily: 'DejaVu Sans',
  };
  return (svg) => new Resvg(svg, { fitTo: { mode: 'zoom', value: PNG_SCALE }, font }).render().asPng();
}

/** Keys to the marks and colours of a picture, for the page and for figures in files of their own. */

import { guessTextWidth } from './charts/Drawing.js';
import { SHARED_FILLS } from './charts/fills.js';
import { stepDecimals } from './charts/ticks.js';
import { escapeHtml, Html, html } from './html.js';

export type Sample =
  | 'line'
  | 'band'
  | 'band-wide'
  | 'simulated'
  | 'hatched'
  | 'striped'
  | 'striped-lightly'
  | 'faint'
  | 'uniform'
  | 'series-a'
  | 'series-b'
  | 'series-c'
  | 'arrow';

/** A sample of a mark, and what it stands for. */
export interface SampleEntry {
  readonly sample: Sample;
  readonly text: string;
}

/** Colour classes, from low to high. */
export interface StripEntry {
  /** One more than there are colours: the bounds of the classes, or words for them. */
  readonly edges: readonly (number | string)[];
  readonly colours: readonly string[];
  /** Whether values lie beyond the first or the last edge. */
  readonly open?: { readonly below: boolean; readonly above: boolean };
}

export type LegendPart = SampleEntry | StripEntry;

const SAMPLE_WIDTH = 22;
const SAMPLE_HEIGHT = 12;

const box = (fill: string) => `<rect width="22" height="12" fill="${fill}"/>`;
const FRAME =
  '<rect x="0.5" y="0.5" width="21" height="11" fill="none" stroke="var(--muted)" stroke-width="0.75"/>';
const stroke = (colour: string, more: string) =>
  `<path d="M0,6h22" fill="none" stroke="var(--${colour})" ${more}/>`;

const SAMPLES: Readonly<Record<Sample, string>> = {
  line: stroke('line', 'stroke-width="2.5"'),
  band: box('var(--band)'),
  'band-wide': box('var(--band-wide)'),
  simulated: box('var(--simulated-band)') + stroke('simulated', 'stroke-width="2" stroke-dasharray="5 3"'),
  hatched: box('url(#hatch)') + FRAME,
  striped: box('var(--value-4)') + box('url(#veil)') + FRAME,
  'striped-lightly': box('var(--value-4)') + box('url(#veil-light)') + FRAME,
  faint: stroke('muted', 'stroke-width="1" stroke-opacity="0.7"'),
  uniform: box('var(--value-3)') + FRAME,
  'series-a': stroke('track-a', 'stroke-width="2"'),
  'series-b': stroke('track-b', 'stroke-width="2" stroke-dasharray="6 3"'),
  'series-c': stroke('track-d', 'stroke-width="2" stroke-dasharray="2 3"'),
  arrow: '<path d="M1,6h19m-5,-4l5,4l-5,4" fill="none" stroke="var(--line)" stroke-width="1.75"/>',
};

const STRIP_WIDTH = 372;
const STRIP_HEIGHT = 32;
const STRIP_MARGIN = 22;
const STRIP_FONT = 11.5;

/** The elements of a strip of colour classes with their edges, in a box of 372 by 32. */
function drawStrip({ edges, colours, open }: StripEntry): string {
  const step = (STRIP_WIDTH - 2 * STRIP_MARGIN) / Math.max(colours.length, 1);
  const decimals = stepDecimals(edges.filter((edge) => typeof edge === 'number'));
  const boxes = colours.map(
    (colour, i) =>
      `<rect x="${(STRIP_MARGIN + i * step).toFixed(1)}" y="2" width="${(step + 0.1).toFixed(1)}" height="12" fill="${colour}"/>`,
  );
  const labels = edges.map((edge, i) => {
    const text = typeof edge === 'string' ? edge : edge.toFixed(decimals).replace('-', '−');
    const sign = i === 0 && open?.below ? '≤ ' : i === edges.length - 1 && open?.above ? '≥ ' : '';
    return { x: STRIP_MARGIN + i * step, text: sign + text };
  });
  // Every second edge is enough where numbers are long.
  const widest = Math.max(...labels.map((label) => label.text.length)) * STRIP_FONT * 0.62 + 6;
  const every = Math.max(1, Math.ceil(widest / step));
  const texts = labels
    .filter((_, i) => i % every === 0)
    .map((label) => `<text x="${label.x.toFixed(1)}" y="28">${escapeHtml(label.text)}</text>`);
  const frame = `<rect x="${STRIP_MARGIN}" y="2" width="${(step * colours.length).toFixed(1)}" height="12" fill="none" stroke="var(--muted)" stroke-width="0.75"/>`;
  return `<g font-size="${STRIP_FONT}" text-anchor="middle" fill="currentColor">${boxes.join('')}${frame}${texts.join('')}</g>`;
}

const isStrip = (part: LegendPart): part is StripEntry => 'edges' in part;

/** The key as a row of the page. */
export function writeLegend(parts: readonly LegendPart[]): Html {
  return html`${parts.map((part) =>
    isStrip(part)
      ? new Html(
          `<svg class="strip" viewBox="0 0 ${STRIP_WIDTH} ${STRIP_HEIGHT}" aria-hidden="true">${drawStrip(part)}</svg>`,
        )
      : html`<span class="entry">${new Html(`<svg class="sample" viewBox="0 0 ${SAMPLE_WIDTH} ${SAMPLE_HEIGHT}" aria-hidden="true">${SAMPLES[part.sample]}</svg>`)}${part.text}</span>`,
  )}`;
}

/** The key as SVG elements that fill a given width from the top left corner; its height with them. */
export function drawLegend(
  parts: readonly LegendPart[],
  width: number,
): { readonly svg: string; readonly height: number } {
  const fontSize = 12;
  let [x, y, bottom] = [0, 0, 0];
  const drawn = parts.map((part) => {
    const needed = isStrip(part) ? STRIP_WIDTH : SAMPLE_WIDTH + 7 + guessTextWidth(part.text, fontSize) + 14;
    if (x > 0 && x + needed > width) [x, y] = [0, bottom];
    const at = `translate(${x.toFixed(1)},${y.toFixed(1)})`;
    x += needed;
    bottom = Math.max(bottom, y + (isStrip(part) ? STRIP_HEIGHT + 4 : 19));
    return isStrip(part)
      ? `<g transform="${at}">${drawStrip(part)}</g>`
      : `<g transform="${at}"><g transform="translate(0,3)">${SAMPLES[part.sample]}</g><text x="${SAMPLE_WIDTH + 7}" y="13" font-size="${fontSize}" fill="currentColor">${escapeHtml(part.text)}</text></g>`;
  });
  return { svg: drawn.join(''), height: bottom };
}

/** The shared fills as a drawing of no size, once per page. */
export const PAGE_FILLS = new Html(`<svg class="defs" aria-hidden="true">${SHARED_FILLS}</svg>`);

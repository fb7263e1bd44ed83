/** A picture on the page: heading, key, chart, and the box that says the value at a place; kept for files as well. */

import type { Chart } from './charts/Drawing.js';
import { escapeHtml, Html, html } from './html.js';
import { type LegendPart, writeLegend } from './legend.js';

/** Columns of the numbers behind a picture, all of one length; NaN where there is none. */
export type FigureTable = readonly {
  readonly name: string;
  readonly values: ArrayLike<number | string>;
}[];

/** A picture with all that is needed to understand it away from the page. */
export interface Figure {
  /** Lower-case letters, digits and hyphens; unique on the page. */
  readonly name: string;
  readonly title: string;
  readonly note: string;
  readonly legend: readonly LegendPart[];
  readonly chart: Chart;
  readonly table: FigureTable;
}

export interface FigureOptions {
  /** Name for files, made unique where it was used before. */
  readonly name: string;
  readonly title: string;
  /** One or two short sentences under the heading. */
  readonly note?: string;
  readonly legend?: readonly LegendPart[];
  /** A legend that stands once for several pictures: not on the page, but in the file of each. */
  readonly sharedLegend?: readonly LegendPart[];
  /** Heading of the file, where the heading on the page leans on what stands around it. */
  readonly fileTitle?: string;
  /** What the picture shows, for readers who do not see it. */
  readonly label: string;
  /** One chart for every width of page, or one for broad and one for narrow pages. */
  readonly chart: Chart | { readonly broad: Chart; readonly narrow: Chart };
  readonly table: FigureTable;
}

function drawPlot(chart: Chart, label: string, width: string): Html {
  const shape = `class="plot ${width}" aria-label="${escapeHtml(label)}"`;
  if (chart.probes.length === 0) return new Html(`<div ${shape} role="img">${chart.svg}</div>`);
  // In single quotes the many quotes of JSON need no escapes.
  const probes = JSON.stringify(chart.probes)
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll("'", '&#39;');
  return new Html(
    `<div ${shape} role="application" aria-roledescription="chart" tabindex="0" aria-describedby="how-to-read" data-probes='${probes}'>${chart.svg}<output aria-live="polite"></output></div>`,
  );
}

function chooseName(gallery: readonly Figure[], wanted: string): string {
  const plain =
    wanted
      .toLowerCase()
      .replace(/[^a-z0-9]+/g, '-')
      .replace(/^-|-$/g, '')
      .slice(0, 60) || 'figure';
  const isTaken = (name: string) => gallery.some((figure) => figure.name === name);
  if (!isTaken(plain)) return plain;
  let number = 2;
  while (isTaken(`${plain}-${number}`)) number++;
  return `${plain}-${number}`;
}

/** The picture as a part of the page; it is also added to the gallery. */
export function drawFigure(gallery: Figure[], options: FigureOptions): Html {
  const { chart, label, title, note = '', legend = [] } = options;
  gallery.push({
    name: chooseName(gallery, options.name),
    title: options.fileTitle ?? title,
    note,
    legend: [...legend, ...(options.sharedLegend ?? [])],
    chart: 'svg' in chart ? chart : chart.broad,
    table: options.table,
  });
  const plots =
    'svg' in chart
      ? drawPlot(chart, label, 'any')
      : html`${drawPlot(chart.broad, label, 'broad')}${drawPlot(chart.narrow, label, 'narrow')}`;
  return html`<figure>
<figcaption><h4>${title}</h4>${note === '' ? null : html`<p>${note}</p>`}</figcaption>
<div class="key">${writeLegend(legend)}</div>
<div>${plots}</div>
</figure>
`;
}

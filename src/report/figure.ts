/** A picture on the page: heading, key, chart, and the line that says the value under the pointer. */

import type { Chart } from './charts/Drawing.js';
import { escapeHtml, Html, html, type HtmlPart } from './html.js';

export interface FigureOptions {
  readonly title: HtmlPart;
  /** One or two sentences under the heading. */
  readonly note?: HtmlPart;
  /** Key to colours and lines. */
  readonly key?: HtmlPart;
  /** What the picture shows, for readers who do not see it. */
  readonly label: string;
  /** One chart for every width of page, or one for broad and one for narrow pages. */
  readonly chart: Chart | { readonly broad: Chart; readonly narrow: Chart };
}

function drawPlot(chart: Chart, label: string, width: string): Html {
  const probes = chart.probes.map(([x, y, text]) => [x, y, text]);
  const attributes =
    probes.length > 0
      ? ` tabindex="0" data-probes="${escapeHtml(JSON.stringify(probes))}" aria-describedby="how-to-read"`
      : '';
  return new Html(
    `<div class="plot ${width}" role="img" aria-label="${escapeHtml(label)}"${attributes}>${chart.svg}</div>`,
  );
}

export function drawFigure(options: FigureOptions): Html {
  const { chart, label } = options;
  const plots =
    'svg' in chart
      ? drawPlot(chart, label, 'any')
      : html`${drawPlot(chart.broad, label, 'broad')}${drawPlot(chart.narrow, label, 'narrow')}`;
  const speaks = 'svg' in chart ? chart.probes.length > 0 : chart.broad.probes.length > 0;
  return html`<figure>
<figcaption><h4>${options.title}</h4>${options.note ? html`<p>${options.note}</p>` : null}</figcaption>
<div class="key">${options.key}</div>
<div>${plots}</div>
${speaks ? html`<output aria-live="polite"></output>` : html`<div></div>`}
</figure>
`;
}

/** One entry of a key: a small sample of the mark and what it stands for. */
export function keyEntry(sample: string, text: string): Html {
  return html`<span class="entry"><i class="sample ${sample}"></i>${text}</span>`;
}

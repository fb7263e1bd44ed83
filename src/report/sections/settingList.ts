/** Names and values side by side. */

import { type Html, html } from '../html.js';

export function writeList(
  entries: readonly (readonly [name: string, value: Html | string])[],
  single = false,
): Html {
  return html`<dl class="settings${single ? ' single' : ''}">${entries.map(
    ([name, value]) => html`<div><dt>${name}</dt><dd>${value}</dd></div>`,
  )}</dl>`;
}

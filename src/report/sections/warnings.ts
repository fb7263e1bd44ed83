/** Warnings as a list. */

import type { Warning } from '../../errors.js';
import { type Html, html, tameText } from '../html.js';
import { capitalize } from './Section.js';

export function writeWarnings(warnings: readonly Warning[]): Html {
  return html`<ul class="notes">${warnings.map(
    ({ message, code }) =>
      html`<li>${capitalize(tameText(message, 600))}<span class="tag">${tameText(code, 60)}</span></li>`,
  )}</ul>`;
}

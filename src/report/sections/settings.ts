/** Every setting, source, hash and seed: enough to make the fit again. */

import { formatNumber } from '../format.js';
import { html, tameText } from '../html.js';
import type { PageContext, Section } from './Section.js';

/** A setting as text: nested settings are written as JSON. */
function writeValue(value: unknown): string {
  if (value === null || value === undefined) return 'none';
  if (typeof value === 'string') return tameText(value, 200);
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (typeof value === 'number') return String(value);
  const text = JSON.stringify(value);
  return text === '{}' || text === '[]' ? 'none' : tameText(text, 300);
}

/** `frictionForm` as `friction form`. */
const spellName = (name: string) => tameText(name.replace(/([a-z])([A-Z])/g, '$1 $2').toLowerCase(), 60);

function drawList(entries: readonly (readonly [string, unknown])[]) {
  return html`<dl class="settings">${entries.map(([name, value]) => html`<div><dt>${spellName(name)}</dt><dd>${writeValue(value)}</dd></div>`)}</dl>`;
}

export function writeSettings(context: PageContext): Section {
  const { fit } = context;
  const diagnostics = Object.entries(fit.diagnostics);
  const seconds = Object.values(fit.timing).reduce((sum, value) => sum + value, 0);
  const body = html`<h3>Sources</h3>
<dl class="settings single">${fit.sources.map((source) => html`<div><dt>${tameText(source.path.split(/[\\/]/).pop() ?? source.path, 90)}</dt><dd class="hash">SHA-256 ${tameText(source.sha256, 64)}</dd></div>`)}</dl>
<h3>Study</h3>${drawList(Object.entries(fit.study))}
${diagnostics.length > 0 ? html`<h3>What the estimator says of itself</h3><details><summary>${diagnostics.length} entries</summary>${drawList(diagnostics)}</details>` : null}
<h3>Program</h3>${drawList([
    ['program', fit.program],
    ['fit written', fit.created],
    ['time taken', `${formatNumber(seconds)} s`],
    ['uncertainty', fit.uncertainty.method],
    ['replicates', fit.uncertainty.replicates.length],
    ['seed', fit.study.seed],
  ])}`;
  return { id: 'settings', title: 'Settings, sources and seeds', body };
}

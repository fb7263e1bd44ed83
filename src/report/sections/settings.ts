/** Every setting, source, hash and seed: enough to make the fit again. */

import { formatNumber, formatSetting } from '../format.js';
import { html, tameText } from '../html.js';
import type { PageContext, Section } from './Section.js';
import { writeList } from './settingList.js';

/** A setting as text, in one line. */
function writeValue(value: unknown): string {
  if (value === null || value === undefined) return 'none';
  if (typeof value === 'string') return tameText(value, 200);
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (typeof value === 'number') return Number.isInteger(value) ? String(value) : formatSetting(value);
  if (Array.isArray(value)) {
    if (value.length === 0) return 'none';
    if (value.every((item) => typeof item === 'number'))
      return tameText(value.map(writeValue).join(', '), 300);
    return tameText(JSON.stringify(value), 300);
  }
  const parts = Object.entries(value).filter(([, item]) => item !== null && item !== undefined);
  if (parts.length === 0) return 'none';
  return tameText(parts.map(([name, item]) => `${name}: ${writeValue(item)}`).join(', '), 300);
}

/** `frictionForm` as `friction form`. */
const spellName = (name: string) => tameText(name.replace(/([a-z])([A-Z])/g, '$1 $2').toLowerCase(), 60);

const listEntries = (entries: readonly (readonly [string, unknown])[]) =>
  writeList(entries.map(([name, value]) => [spellName(name), writeValue(value)] as const));

/** Keys of the study that say nothing for the order that was fitted. */
const IDLE = {
  first: ['force', 'friction', 'noise', 'frictionForm'],
  second: ['drift', 'diffusion'],
} as const;

export function writeSettings(context: PageContext): Section {
  const { fit, resimulation, scenario } = context;
  const idle: readonly string[] = IDLE[fit.model.order];
  const diagnostics = Object.entries(fit.diagnostics);
  const seconds = Object.values(fit.timing ?? {}).reduce((sum, value) => sum + value, 0);
  const sources = (fit.sources ?? []).map((source): [string, ReturnType<typeof html>] => [
    tameText(source.path.split(/[\\/]/).pop() ?? source.path, 90),
    html`<span class="hash">SHA-256 ${tameText(source.sha256, 64)}</span>`,
  ]);
  const seeds: [string, unknown][] = [
    ['seed of the fit', fit.study.seed],
    ['replicates of the fit', fit.uncertainty.replicates.length],
    ...(resimulation
      ? ([
          ['seed of the re-simulation', resimulation.seed],
          ['simulated recordings', resimulation.replicates],
        ] as [string, unknown][])
      : []),
    ...(scenario && typeof scenario.provenance.seed === 'number'
      ? ([['seed behind the scenario', scenario.provenance.seed]] as [string, unknown][])
      : []),
  ];
  const body = html`${sources.length > 0 ? html`<h3>Sources</h3>${writeList(sources, true)}` : null}
<h3>Study</h3>${listEntries(Object.entries(fit.study).filter(([name]) => !idle.includes(name)))}
<h3>Seeds and program</h3>${listEntries([
    ...seeds,
    ...(fit.program === undefined ? [] : [['program', fit.program] as const]),
    ...(fit.created === undefined ? [] : [['fit written', fit.created] as const]),
    ...(seconds > 0 ? [['time taken', `${formatNumber(seconds, 2)} s`] as const] : []),
    ['uncertainty', fit.uncertainty.method],
  ])}
${diagnostics.length > 0 ? html`<h3>What the estimator says of itself</h3>${listEntries(diagnostics)}` : null}`;
  return { id: 'settings', title: 'Settings, sources and seeds', body };
}

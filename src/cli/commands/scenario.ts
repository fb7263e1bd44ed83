/** `scenario FIT`: a calibrated scenario that can be read, changed and run. */

import type { FitDocument } from '../../documents/FitDocument.js';
import type { Scenario } from '../../documents/Scenario.js';
import { assessStanding } from '../../simulation/assessStanding.js';
import { buildFirstOrderScenario } from '../../simulation/buildFirstOrderScenario.js';
import { buildScenario } from '../../simulation/buildScenario.js';
import { warnOfConditions } from '../../simulation/standingConditions.js';
import { formatUnit } from '../../units.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { checkResultPlace, deliver, formatJson } from '../results.js';
import type { Terminal } from '../Terminal.js';

/** @throws UsageError */
export async function runScenario({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  checkResultPlace(options.output, [fitPath], terminal);
  const fit = await readFit(fitPath, terminal);
  const scenario = await buildTitledScenario(
    fit,
    options.title as string | undefined,
    options.firstOrder === true,
    terminal,
  );
  tellStanding(scenario, terminal);
  for (const warning of scenario.warnings) terminal.warn(warning);
  await deliver(formatJson(scenario), options.output, terminal);
  if (options.json && options.output !== undefined) await terminal.print(formatJson(scenario));
}

/** The scenario of a fit, or its first-order limit, under the title given and with its standing conditions. */
export async function buildTitledScenario(
  fit: FitDocument,
  title: string | undefined,
  firstOrder: boolean,
  terminal: Terminal,
): Promise<Scenario> {
  const built = buildScenario(fit);
  const scenario = firstOrder ? buildFirstOrderScenario(built).scenario : built;
  const progress = await terminal.startProgress('standing');
  const standing = await assessStanding(scenario, fit.study.seed, (share) =>
    progress.update(share, 1),
  ).finally(progress.stop);
  return {
    ...scenario,
    title: title ?? scenario.title,
    standing,
    warnings: [...scenario.warnings, ...warnOfConditions(standing.conditions)],
  };
}

const VERDICTS = { holds: 'holds', fails: 'FAILS', unknown: 'cannot be told' } as const;

/** The conditions one by one, how fast the law is approached, and what a first-order limit leaves out. */
function tellStanding({ standing, provenance, units }: Scenario, terminal: Terminal): void {
  const { limit } = provenance;
  if (typeof limit === 'object' && limit !== null && !Array.isArray(limit)) {
    const [median, high] = [limit.neglectedMedian, limit.neglectedHigh].map(
      (share) => `${100 * Number(share)} %`,
    );
    terminal.note(
      `first-order limit: neglected terms are ${median} of what is kept in the median over the starting places, ${high} at the 95 % point`,
    );
  }
  for (const { verdict, title, note } of standing?.conditions ?? []) {
    terminal.note(`${VERDICTS[verdict]}: ${title} (${note})`);
  }
  const relaxation = standing?.relaxation;
  if (!relaxation) return;
  const { time, low, high, samples, note } = relaxation;
  const unit = formatUnit('time', units);
  if (time === null || samples === null) terminal.note(`relaxation of the whole process: ${note}`);
  else {
    terminal.note(
      `relaxation of the whole process: ${time} (${low} to ${high ?? 'unbounded'})${unit === '' ? '' : ` ${unit}`}; a recording of this size is worth ${samples.value} independent samples (${samples.low} to ${samples.high})`,
    );
  }
}

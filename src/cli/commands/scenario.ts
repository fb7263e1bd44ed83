/** `scenario FIT`: a calibrated scenario that can be read, changed and run. */

import type { FitDocument } from '../../documents/FitDocument.js';
import type { Scenario } from '../../documents/Scenario.js';
import { buildScenario } from '../../simulation/buildScenario.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { checkResultPlace, deliver, formatJson } from '../results.js';

/** @throws UsageError */
export async function runScenario({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  checkResultPlace(options.output, [fitPath], terminal);
  const scenario = buildTitledScenario(await readFit(fitPath, terminal), options.title as string | undefined);
  for (const warning of scenario.warnings) terminal.warn(warning);
  await deliver(formatJson(scenario), options.output, terminal);
  if (options.json && options.output !== undefined) await terminal.print(formatJson(scenario));
}

/** The scenario of a fit, under the title given. */
export function buildTitledScenario(fit: FitDocument, title?: string): Scenario {
  const scenario = buildScenario(fit);
  return title === undefined ? scenario : { ...scenario, title };
}

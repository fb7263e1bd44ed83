/** `report FIT`: one self-contained page with the pictures. */

import { parseResimulation } from '../../documents/Resimulation.js';
import { renderReport } from '../../report/renderReport.js';
import { parseScenario } from '../../simulation/parseScenario.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readDocument } from '../files.js';
import { checkResultPlace, deliver, formatJson } from '../results.js';
import { formatSuggestion } from '../suggest.js';

/** @throws UsageError */
export async function runReport({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const paths = { resimulation: options.resimulation as string, scenario: options.scenario as string };
  const inputs = [fitPath, ...Object.values(paths).filter((path) => path !== undefined)];
  checkResultPlace(options.output, inputs, terminal);
  const fit = await readFit(fitPath, terminal);
  const read = async <Document>(
    path: string | undefined,
    kind: string,
    parse: (value: unknown, source: string) => Document,
  ): Promise<Document | undefined> =>
    path === undefined ? undefined : parse(await readDocument(terminal.resolve(path), kind, path), path);
  const resimulation = await read(paths.resimulation, 'resimulation file', (value, source) =>
    parseResimulation(value, { source, suggest: formatSuggestion }),
  );
  const scenario = await read(paths.scenario, 'scenario', parseScenario);
  const page = await renderReport({ fit, resimulation, scenario });
  if (options.json && options.output !== undefined) {
    await deliver(page, options.output, terminal);
    await terminal.print(formatJson({ output: options.output, bytes: Buffer.byteLength(page) }));
    return;
  }
  await deliver(page, options.output, terminal);
}

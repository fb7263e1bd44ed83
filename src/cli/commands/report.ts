/** `report FIT`: one self-contained page with the pictures, and the pictures as files. */

import { join } from 'node:path';
import { parseResimulation } from '../../documents/Resimulation.js';
import { parseChallengeResult, parseTestResults } from '../../documents/TestResult.js';
import type { Figure } from '../../report/figure.js';
import { composeFigure, openPngRenderer } from '../../report/figureFile.js';
import { drawReport } from '../../report/renderReport.js';
import { parseScenario } from '../../simulation/parseScenario.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { checkOutput, makeDirectory, readDocument, writeWhole } from '../files.js';
import { checkResultPlace, deliver, formatJson } from '../results.js';
import { formatSuggestion } from '../suggest.js';
import { formatTable } from '../tables.js';
import type { Terminal } from '../Terminal.js';

/** @throws UsageError */
export async function runReport({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const { resimulation, challenges, scenario, figures, output } = options as Record<
    string,
    string | undefined
  >;
  const tests = (options.tests as string[] | undefined) ?? [];
  const others = [resimulation, challenges, scenario].filter((path) => path !== undefined);
  checkResultPlace(output, [fitPath, ...others, ...tests], terminal);
  const read = async <Document>(
    path: string | undefined,
    kind: string,
    parse: (value: unknown, place: typeof SUGGESTING & { source: string }) => Document,
  ): Promise<Document | undefined> =>
    path === undefined
      ? undefined
      : parse(await readDocument(terminal.resolve(path), kind, path), { ...SUGGESTING, source: path });

  const { page, figures: pictures } = await drawReport({
    fit: await readFit(fitPath, terminal),
    resimulation: await read(resimulation, 'resimulation file', parseResimulation),
    tests: (await Promise.all(tests.map((path) => read(path, 'test result', parseTestResults)))).flatMap(
      (results) => results ?? [],
    ),
    challenges: (await read(challenges, 'challenge result', parseChallengeResult))?.checks,
    scenario: await read(scenario, 'scenario', (value, { source }) => parseScenario(value, source)),
  });
  const written = figures === undefined ? [] : await writeFigures(pictures, figures, terminal);
  if (output !== undefined || figures === undefined) await deliver(page, output, terminal);
  if (options.json && (output !== undefined || figures !== undefined)) {
    await terminal.print(formatJson({ output, bytes: Buffer.byteLength(page), figures: written }));
  }
}

const SUGGESTING = { suggest: formatSuggestion };

/** Writes every picture as SVG, PNG and CSV; returns the names of the files as shown to the user. */
async function writeFigures(
  figures: readonly Figure[],
  directory: string,
  terminal: Terminal,
): Promise<string[]> {
  makeDirectory(terminal.resolve(directory), directory);
  checkOutput(terminal.resolve(join(directory, 'figure.svg')), join(directory, 'figure.svg'));
  const drawPng = await openPngRenderer();
  const files: string[] = [];
  const digits = Math.max(2, String(figures.length).length);
  const progress = await terminal.startProgress('drawing');
  for (const [index, figure] of figures.entries()) {
    progress.update(index, figures.length);
    const name = join(directory, `${String(index + 1).padStart(digits, '0')}-${figure.name}`);
    const svg = composeFigure(figure);
    for (const [ending, content] of [
      ['svg', svg],
      ['png', drawPng(svg)],
      ['csv', formatTable(figure.table)],
    ] as const) {
      await writeWhole(terminal.resolve(`${name}.${ending}`), content, `${name}.${ending}`);
      files.push(`${name}.${ending}`);
    }
  }
  progress.stop();
  terminal.note(`wrote ${figures.length} figures to ${directory}`);
  return files;
}

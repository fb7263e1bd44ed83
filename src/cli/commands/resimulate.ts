/** `resimulate FIT`: the fit, simulated at the recorded design, against the recording. */

import type { ResimulationResult } from '../../checks/ResimulationResult.js';
import { createRefit } from '../../checks/createRefit.js';
import { checkRegions, type Region } from '../../checks/Region.js';
import { resimulate } from '../../checks/resimulate.js';
import type { FitDocument } from '../../documents/FitDocument.js';
import { formatResimulationSummary } from '../../report/terminal.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readRecordingOfFit } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';
import type { Terminal } from '../Terminal.js';
import { readVersion } from '../version.js';
import { withWorkers } from '../workers.js';

/** Simulated recordings where --replicates does not say. */
const REPLICATES = 99; // p-values in steps of 0.01

/** @throws UsageError, DataError, NumericalError */
export async function runResimulate({ operands, options, terminal }: Call): Promise<void> {
  const [fitPath] = operands;
  const overrides = options.tracks as string[] | undefined;
  checkResultPlace(options.output, [fitPath, ...(overrides ?? [])], terminal);
  const fit = await readFit(fitPath, terminal);
  const result = await resimulateFit(fit, terminal.resolve(fitPath), terminal, {
    overrides,
    replicates: options.replicates as number | undefined,
    seed: options.seed as number | undefined,
    refit: options.refit !== false,
    regions: options.region as Region[] | undefined,
    workers: options.workers,
  });
  for (const warning of result.warnings) terminal.warn(warning);
  const text = wantsJson(options)
    ? formatJson(describeResimulation(result))
    : formatResimulationSummary(result, terminal.summaryStyle);
  await deliver(text, options.output, terminal);
}

export interface ResimulateChoices {
  readonly overrides?: readonly string[];
  readonly replicates?: number;
  readonly seed?: number;
  readonly refit: boolean;
  readonly regions?: readonly Region[];
  readonly workers: unknown;
}

/** Reads the tracks of a fit again and re-simulates it. */
export async function resimulateFit(
  fit: FitDocument,
  fitPath: string,
  terminal: Terminal,
  choices: ResimulateChoices,
): Promise<ResimulationResult> {
  checkRegions(choices.regions ?? [], fit.model.dimensions);
  const recording = await readRecordingOfFit(fit, fitPath, choices.overrides, terminal);
  const progress = await terminal.startProgress('simulating');
  return withWorkers(choices.workers, (mapTasks) =>
    resimulate(fit, recording.tracks, {
      replicates: choices.replicates ?? REPLICATES,
      seed: choices.seed ?? 1,
      regions: choices.regions,
      refit: choices.refit ? createRefit(fit) : undefined,
      mapTasks,
      onProgress: progress.update,
    }),
  ).finally(progress.stop);
}

/** The result as the document that `report --resimulation` reads. */
export function describeResimulation(result: ResimulationResult): Record<string, unknown> {
  return {
    format: 'wanderlaw-resimulation',
    version: 1,
    program: `wanderlaw ${readVersion()}`,
    ...result,
  };
}

/** `fit TRACKS…`: the coefficients with their uncertainty, as a fit file. */

import type { FitDocument } from '../../documents/FitDocument.js';
import { fitSchema } from '../../documents/FitDocument.js';
import type { Study } from '../../documents/Study.js';
import { NumericalError, UsageError } from '../../errors.js';
import { chooseEstimator } from '../../estimation/choose.js';
import { parseShape } from '../../fields/shapes.js';
import { fitTracks } from '../../fit.js';
import type { MapTasks } from '../../numerics/MapTasks.js';
import { formatFitSummary } from '../../report/terminal.js';
import type { Call } from '../commandTable.js';
import { writeWhole } from '../files.js';
import { OPTIONS } from '../options.js';
import { readRecording } from '../recordings.js';
import { checkResultPlace, deliver, formatJson } from '../results.js';
import { resolveStudy } from '../study.js';
import type { Terminal } from '../Terminal.js';
import { readVersion } from '../version.js';
import { withWorkers } from '../workers.js';

/** @throws UsageError, DataError, NumericalError */
export async function runFit({ operands, options, terminal }: Call): Promise<void> {
  const study = await resolveStudy(options, terminal);
  checkPlan(study);
  const writeStudy = options.writeStudy as string | undefined;
  const inputs = typeof options.study === 'string' ? [...operands, options.study] : operands;
  checkResultPlace(options.output, inputs, terminal);
  checkResultPlace(writeStudy, inputs, terminal, '--write-study');
  checkApart(options.output, writeStudy, terminal);
  if (operands.length === 0) return writeTemplate(study, writeStudy, options, terminal);

  const fit = await fitFiles(operands, study, terminal, options.workers);
  for (const warning of fit.warnings) terminal.warn(warning);
  warnOfUnusedOptions(options, fit, terminal);
  if (typeof options.output === 'string') await deliver(formatJson(fit), options.output, terminal);
  if (options.json) await terminal.print(formatJson(fit));
  else await terminal.print(formatFitSummary(fit, terminal.summaryStyle));
  if (writeStudy !== undefined) {
    await writeWhole(terminal.resolve(writeStudy), formatJson(fit.study), writeStudy);
    terminal.note(`wrote ${writeStudy}: every choice of this fit; --study ${writeStudy} repeats it`);
  }
  if (options.output === undefined && !options.json) {
    terminal.note('nothing was written; -o fit.json keeps the fit');
  }
}

/** The fit and the study are two files. */
function checkApart(output: unknown, writeStudy: string | undefined, terminal: Terminal): void {
  if (typeof output !== 'string' || writeStudy === undefined) return;
  if (terminal.resolve(output) !== terminal.resolve(writeStudy)) return;
  throw new UsageError(`-o and --write-study both name ${output}; give the study a file of its own`, {
    option: '--write-study',
  });
}

/** Without tracks: the choices made so far as a study file, to be filled in and used later. */
async function writeTemplate(
  study: Study,
  writeStudy: string | undefined,
  options: Call['options'],
  terminal: Terminal,
): Promise<void> {
  if (writeStudy === undefined || options.output !== undefined) {
    throw new UsageError(
      'fit needs track tables (CSV, TSV, gzipped, or Parquet); wanderlaw fit --help explains it',
    );
  }
  await writeWhole(terminal.resolve(writeStudy), formatJson(study), writeStudy);
  if (options.json) await terminal.print(formatJson(study));
  const open = study.order === 'auto' ? ', the order left to the tracks' : '';
  terminal.note(`wrote ${writeStudy}: every choice with its value${open}; --study ${writeStudy} uses it`);
}

/** Reads and fits tracks, and adds what only the program knows: sources, version and clock. */
export async function fitFiles(
  paths: readonly string[],
  study: Study,
  terminal: Terminal,
  workers: unknown,
): Promise<FitDocument> {
  const started = performance.now();
  const recording = await readRecording(paths, study, terminal);
  const read = performance.now();
  const progress = await terminal.startProgress('fitting');
  const fitWith = (mapTasks?: MapTasks) =>
    fitTracks(recording.tracks, study, { onProgress: progress.update, mapTasks });
  const fitting = study.refine ? withWorkers(workers, fitWith) : fitWith();
  const result = await fitting.finally(progress.stop);
  const fitted = performance.now();
  const { study: resolved, warnings, ...rest } = result;
  const fit: FitDocument = {
    format: 'wanderlaw-fit',
    version: 1,
    program: `wanderlaw ${readVersion()}`,
    created: new Date().toISOString(),
    timing: { reading: seconds(read - started), fitting: seconds(fitted - read) },
    study: resolved,
    sources: [...recording.sources],
    ...rest,
    warnings: [...recording.warnings, ...warnings],
  };
  checkNumbers(fit);
  return fit;
}

function seconds(milliseconds: number): number {
  return Math.round(milliseconds) / 1000;
}

/** A fit that its own schema refuses (a coefficient that is not finite) is never written. */
function checkNumbers(fit: FitDocument): void {
  const checked = fitSchema.safeParse(fit);
  if (checked.success) return;
  const [{ path, message }] = checked.error.issues;
  throw new NumericalError(
    `the fit has no usable value at ${path.join('.')} (${message}); try simpler shapes, or look at the tracks with wanderlaw survey`,
    { at: path.join('.') },
  );
}

/** Estimator and shapes are looked up before the tracks are read, so that a slip costs no waiting. */
function checkPlan(study: Study): void {
  chooseEstimator(study.estimator);
  const names =
    study.order === 'second'
      ? (['force', 'friction', 'noise'] as const)
      : study.order === 'first'
        ? (['drift', 'diffusion'] as const)
        : (['force', 'friction', 'noise', 'drift', 'diffusion'] as const);
  for (const name of names) parseShape(study[name], `--${name}`);
}

/** With `--order auto` it shows only now which options had no part in the fit. */
function warnOfUnusedOptions(options: Call['options'], fit: FitDocument, terminal: Terminal): void {
  const idle =
    fit.model.order === 'first'
      ? (['force', 'friction', 'noise', 'frictionForm'] as const)
      : (['drift', 'diffusion'] as const);
  for (const key of idle) {
    if (options[key] === undefined) continue;
    const flag = OPTIONS[key].flags.split(' ')[0];
    terminal.warn({
      code: 'unused-option',
      message: `${flag} had no part in the fit, which is of ${fit.model.order} order; --order decides it`,
    });
  }
}

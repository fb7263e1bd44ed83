/** `demo [NAME]`: survey, fit, tests, challenges, re-simulation, scenario and report of a shipped data set. */

import { existsSync, readdirSync } from 'node:fs';
import { readFile } from 'node:fs/promises';
import { join, relative } from 'node:path';
import { completeStudy } from '../../documents/parseStudy.js';
import type { FitDocument } from '../../documents/FitDocument.js';
import type { StudyInput } from '../../documents/Study.js';
import { UsageError } from '../../errors.js';
import { surveyTracks } from '../../momenta/surveyTracks.js';
import { renderReport } from '../../report/renderReport.js';
import {
  formatChallengeSummary,
  formatFitSummary,
  formatResimulationSummary,
  formatSurveySummary,
  formatTestSummary,
} from '../../report/terminal.js';
import { judgeFitTask, type Judgement, type Question } from '../../workers/judgeFitTask.js';
import { type Call, DATA_SETS } from '../commandTable.js';
import { checkOutput, makeDirectory, writeWhole } from '../files.js';
import { readRecording } from '../recordings.js';
import { formatJson } from '../results.js';
import { formatSuggestion } from '../suggest.js';
import { PACKAGE_ROOT } from '../version.js';
import { fitFiles } from './fit.js';
import { describeResimulation, resimulateFit } from './resimulate.js';
import { withWorkers } from '../workers.js';
import { buildTitledScenario } from './scenario.js';

/** The part of a data package that the demo reads. */
interface DataPackage {
  readonly title: string;
  readonly question?: string;
  readonly resources: readonly { readonly path: string }[];
  readonly wanderlaw: { readonly study: StudyInput };
}

/** @throws UsageError  for an unknown data set or a directory that cannot be written */
export async function runDemo({ operands, options, terminal }: Call): Promise<void> {
  const name = operands[0] ?? DATA_SETS[0];
  const dataPackage = await readDataPackage(name);
  const shown = (options.output as string | undefined) ?? join('out', name);
  const directory = terminal.resolve(shown);
  makeDirectory(directory, shown);
  const place = (file: string): string => join(directory, file);
  const files: string[] = [];
  const keep = async (file: string, text: string): Promise<void> => {
    await writeWhole(place(file), text, join(shown, file));
    files.push(join(shown, file));
  };
  checkOutput(place('fit.json'), join(shown, 'fit.json'));
  const say = async (text: string): Promise<void> => {
    if (!options.json) await terminal.print(text);
  };

  const { bold } = terminal.colors;
  await say(`${bold(dataPackage.title)}\n${dataPackage.question ?? ''}\n\n`);
  const study = completeStudy(dataPackage.wanderlaw.study);
  const tracksPath = join(PACKAGE_ROOT, 'datasets', name, dataPackage.resources[0].path);
  const paths = [relative(terminal.streams.cwd, tracksPath)];

  const recording = await readRecording(paths, study, terminal);
  const survey = surveyTracks(recording.tracks, {
    localizationError: study.localizationError,
    exposure: study.exposure,
  });
  await keep('survey.json', formatJson(survey));
  await say(`${formatSurveySummary({ ...survey, units: study.units }, terminal.summaryStyle)}\n`);

  const fit = await fitFiles(paths, study, terminal, options.workers);
  await keep('fit.json', formatJson(fit));
  await say(`${formatFitSummary(fit, terminal.summaryStyle)}\n`);

  // Side by side: the refits of the re-simulation keep one thread busy, tests and challenges another.
  const [judgements, resimulation] = await Promise.all([
    withWorkers(
      options.workers,
      (mapTasks): Promise<Judgement[]> =>
        mapTasks(judgeFitTask, { fit, tracks: recording.tracks }, listQuestions(fit)),
    ),
    resimulateFit(fit, place('fit.json'), terminal, { refit: true, workers: options.workers }),
  ]);
  const tests = judgements.flatMap(({ test }) => test ?? []);
  const [challenge] = judgements.flatMap((each) => each.challenge ?? []);
  await keep('tests.json', formatJson(tests));
  await keep('challenge.json', formatJson(challenge));
  await say(`${formatTestSummary(tests, terminal.summaryStyle)}\n`);
  await say(`${formatChallengeSummary(challenge.checks, terminal.summaryStyle)}\n`);
  await keep('resimulation.json', formatJson(describeResimulation(resimulation)));
  await say(`${formatResimulationSummary(resimulation, terminal.summaryStyle)}\n`);

  const scenario = await buildTitledScenario(fit, dataPackage.title, false, terminal);
  await keep('scenario.json', formatJson(scenario));
  await keep(
    'report.html',
    await renderReport({ fit, tests, challenges: challenge.checks, resimulation, scenario }),
  );

  if (options.json) {
    await terminal.print(
      formatJson({
        name,
        files,
        consistent: resimulation.consistent,
        order: fit.model.order,
        rejected: tests.filter(({ rejected }) => rejected).map(({ hypothesis }) => hypothesis),
        holds: challenge.holds,
        warnings: fit.warnings,
      }),
    );
    return;
  }
  await say(`${bold('Written')}\n${files.map((file) => `  ${file}\n`).join('')}`);
}

/** What a newcomer would ask of such a fit first, and whether its model holds. */
function listQuestions({ model }: FitDocument): Question[] {
  if (model.order === 'first') return ['uniform-noise', 'zero-force', 'challenge'];
  const closed = model.dimensions > 1 || model.periods[0] > 0; // else every force has a potential
  return ['uniform-friction', closed ? 'conservative-force' : 'zero-force', 'challenge'];
}

async function readDataPackage(name: string): Promise<DataPackage> {
  const root = join(PACKAGE_ROOT, 'datasets');
  const names = readdirSync(root, { withFileTypes: true })
    .filter((entry) => entry.isDirectory() && existsSync(join(root, entry.name, 'datapackage.json')))
    .map((entry) => entry.name)
    .sort();
  if (!names.includes(name)) {
    throw new UsageError(
      `"${name}" is not a shipped data set${formatSuggestion(name, names) || '; use one of'} (${names.join(', ')})`,
      { name, choices: names },
    );
  }
  return JSON.parse(await readFile(join(root, name, 'datapackage.json'), 'utf8')) as DataPackage;
}

/** `test FIT`: a statement about the coefficients, tried against the recording. */

import { UsageError } from '../../errors.js';
import { loadFormulaReader } from '../../fields/formula.js';
import { createRecorder } from '../../checks/createRecorder.js';
import type { FitDocument } from '../../documents/FitDocument.js';
import { completeStudy } from '../../documents/parseStudy.js';
import type { Study } from '../../documents/Study.js';
import type { Law } from '../../hypotheses/lawStatement.js';
import { NAMED_LAWS } from '../../hypotheses/namedLaws.js';
import { planTest } from '../../hypotheses/planTest.js';
import { resolveLaws } from '../../hypotheses/resolveLaw.js';
import { testHypothesis } from '../../hypotheses/testHypothesis.js';
import type { HypothesisName, TestResult } from '../../hypotheses/TestResult.js';
import { formatComparisonSummary, formatLawShelf, type ListedLaw } from '../../report/terminal/formatLaws.js';
import { formatTestSummary } from '../../report/terminal.js';
import type { Call } from '../commandTable.js';
import { readFit } from '../documents.js';
import { readRecordingOfFit } from '../recordings.js';
import { checkResultPlace, deliver, formatJson, wantsJson } from '../results.js';
import { readStudyFile } from '../study.js';
import type { Terminal } from '../Terminal.js';

/** @throws UsageError, DataError, NumericalError */
export async function runTest({ operands, options, terminal }: Call): Promise<void> {
  const overrides = options.tracks as string[] | undefined;
  const studyPath = options.study as string | undefined;
  const inputs = [...operands, ...(overrides ?? []), studyPath].filter((path) => path !== undefined);
  checkResultPlace(options.output, inputs, terminal);
  const ownLaws = studyPath === undefined ? {} : completeStudy(await readStudyFile(studyPath, terminal)).laws;
  if (options.laws === true) {
    const fit = operands.length === 0 ? null : await readFit(operands[0], terminal);
    const laws = { ...fit?.study.laws, ...ownLaws };
    const text = wantsJson(options)
      ? formatJson({ laws: listLaws(laws) })
      : formatLawShelf(listLaws(laws), terminal.summaryStyle);
    return deliver(text, options.output, terminal);
  }
  const [fitPath] = operands;
  if (fitPath === undefined) {
    throw new UsageError('test needs a fit file; wanderlaw test --laws lists the laws known by name');
  }
  const hypothesis = chooseHypothesis(options);
  const fit = await readFit(fitPath, terminal);
  const laws = hypothesis === 'law' ? await readLaws(fit, options, ownLaws) : undefined;
  planTest(fit, { hypothesis, field: options.field as string | undefined, laws }); // a slip costs no waiting
  const { tracks } = await readRecordingOfFit(fit, terminal.resolve(fitPath), overrides, terminal);
  const progress = await terminal.startProgress('testing');
  let result: TestResult;
  try {
    result = testHypothesis(fit, tracks, {
      hypothesis,
      confidence: (options.confidence as number | undefined) ?? fit.study.confidence,
      seed: fit.study.seed,
      field: options.field as string | undefined,
      laws,
      simulate: createRecorder(fit, tracks),
      onProgress: progress.update,
    });
  } finally {
    progress.stop();
  }
  await deliver(
    wantsJson(options) ? formatJson(result) : formatForPeople(result, terminal),
    options.output,
    terminal,
  );
}

function formatForPeople(result: TestResult, terminal: Terminal): string {
  const style = terminal.summaryStyle;
  const comparison = result.comparison === undefined ? '' : formatComparisonSummary(result.comparison, style);
  return formatTestSummary([result], style) + comparison;
}

/** --law alone says which hypothesis is meant; law options with another hypothesis are refused, not ignored. */
function chooseHypothesis(options: Call['options']): HypothesisName {
  const hypothesis = options.hypothesis as HypothesisName | undefined;
  const given = (['field', 'law', 'start', 'fix'] as const).filter((key) => options[key] !== undefined);
  if (hypothesis === undefined) {
    if (options.law !== undefined) return 'law';
    throw new UsageError('--hypothesis is needed; wanderlaw test --help lists the hypotheses', {
      option: '--hypothesis',
    });
  }
  if (hypothesis !== 'law' && given.length > 0) {
    throw new UsageError(`--${given[0]} belongs to --hypothesis law, not to ${hypothesis}`, {
      option: `--${given[0]}`,
    });
  }
  return hypothesis;
}

async function readLaws(fit: FitDocument, options: Call['options'], ownLaws: Study['laws']): Promise<Law[]> {
  const { field, law, start, fix } = options as {
    field?: string;
    law?: string[];
    start?: Record<string, number>;
    fix?: Record<string, number>;
  };
  if (field === undefined || law === undefined) {
    const missing = field === undefined ? '--field' : '--law';
    throw new UsageError(
      `--hypothesis law needs ${missing}, for example --field friction --law "g0*(1+a*tanh(x))"`,
      {
        option: missing,
      },
    );
  }
  return resolveLaws(law, {
    readFormula: await loadFormulaReader(),
    coordinates: fit.data.coordinates,
    hasConcentration: fit.study.columns.concentration !== undefined,
    field,
    laws: { ...fit.study.laws, ...ownLaws },
    start: start ?? {},
    fixed: fix ?? {},
  });
}

/** Laws of the study and of the shelf, in one form. */
function listLaws(own: Study['laws']): ListedLaw[] {
  const named = Object.entries(own).map(([name, law]) => ({ name, ...law }));
  return [...named, ...NAMED_LAWS].map(
    ({ name, formula, about, source, range }): ListedLaw => ({
      name,
      formula: typeof formula === 'string' ? { any: formula } : ({ ...formula } as Record<string, string>),
      about,
      source,
      range,
    }),
  );
}

/** Verdicts as the results of a test, in numbers and in words. */

import type { FitResult } from '../documents/FitDocument.js';
import { studentQuantile } from '../numerics/special/student.js';
import { compareLaws } from './compareLaws.js';
import type { Verdict } from './judgeStatement.js';
import type { PlannedRequest } from './planTest.js';
import { profileIntervals } from './profileIntervals.js';
import { tabulatePlaces } from './tabulatePlaces.js';
import type { TestedParameter, TestMethod, TestResult } from './TestResult.js';

/** A verdict with the p-value that counts, and how it was come by. */
export interface JudgedVerdict extends Verdict {
  readonly p: number;
  readonly method: TestMethod;
}

type Request = PlannedRequest & { readonly confidence: number };

/** @param statement  what was tested, in words that follow "the statement that" */
export function describeVerdict(
  fit: FitResult,
  { hypothesis, confidence }: Request,
  verdict: JudgedVerdict,
  statement: string,
): TestResult {
  const { contrasts } = verdict.problem;
  const t = studentQuantile((1 + confidence) / 2, contrasts.blocks - 1);
  const reported = contrasts.reports.map(({ name, value, standardError }): [string, TestedParameter] => [
    name,
    { value, low: value - t * standardError, high: value + t * standardError },
  ]);
  return {
    hypothesis,
    ...describeStatistic(verdict, confidence, statement),
    parameters: { ...nameIntervals(verdict, confidence), ...Object.fromEntries(reported) },
    places: tabulatePlaces(verdict.problem, verdict.fit, fit.visited, fit.data.coordinates, confidence),
  };
}

/** One law, or several with their comparison; what stands on top is the best of them. */
export function describeLaws(
  fit: FitResult,
  request: Request,
  verdicts: readonly JudgedVerdict[],
): TestResult {
  const { laws = [], confidence, field } = request;
  const detail = Math.max(...verdicts.map(({ problem }) => problem.modeCount));
  const problems = verdicts.map(({ problem }) => ({ ...problem, modeCount: detail }));
  const scored = laws.length > 1 ? compareLaws(problems, confidence) : [];
  const order = scored.map((_, i) => i).sort((a, b) => scored[b].score - scored[a].score);
  const best = order[0] ?? 0;
  const verdict = verdicts[best];
  const comparison = order.map((i) => ({
    law: laws[i].name,
    formula: laws[i].formula.text,
    parameters: nameIntervals(verdicts[i], confidence),
    statistic: verdicts[i].strongest.f,
    p: verdicts[i].p,
    rejected: verdicts[i].p < 1 - confidence,
    ...scored[i],
  }));
  return {
    hypothesis: 'law',
    field,
    law: laws[best].name,
    formula: laws[best].formula.text,
    ...describeStatistic(verdict, confidence, `${field} follows ${laws[best].name}`),
    parameters: nameIntervals(verdict, confidence),
    places: tabulatePlaces(verdict.problem, verdict.fit, fit.visited, fit.data.coordinates, confidence),
    ...(comparison.length > 0 ? { comparison } : {}),
  };
}

type Statistic = Omit<TestResult, 'hypothesis' | 'field' | 'law' | 'formula' | 'parameters' | 'places'>;

function describeStatistic(verdict: JudgedVerdict, confidence: number, statement: string): Statistic {
  const { strongest, levels, p, problem, method } = verdict;
  const rejected = p < 1 - confidence;
  return {
    statistic: strongest.f,
    degrees: [strongest.between, strongest.within],
    p,
    method,
    confidence,
    rejected,
    levels: levels.map(({ modes, f, between, within, p: alone }) => ({
      modes,
      f,
      degrees: [between, within],
      p: alone,
    })),
    blocks: problem.contrasts.blocks,
    note: sayVerdict(statement, verdict, rejected),
  };
}

const METHOD_WORDS: Readonly<Record<TestMethod, string>> = {
  theory: '',
  corrected: ', less the bias of recordings simulated under the statement',
  simulation: ', p from recordings simulated under the statement',
};

function sayVerdict(
  statement: string,
  { strongest, method, problem }: JudgedVerdict,
  rejected: boolean,
): string {
  const { f, between, within } = strongest;
  const numbers = `F(${between}, ${within}) = ${f.toPrecision(3)} over ${problem.contrasts.blocks} stretches of the recording`;
  const simulated = METHOD_WORDS[method];
  return rejected
    ? `the data contradict that ${statement} (${numbers}${simulated})`
    : `the data are compatible with the statement that ${statement}, which does not prove it (${numbers}${simulated})`;
}

function nameIntervals(verdict: Verdict, confidence: number): Record<string, TestedParameter> {
  const intervals = profileIntervals(verdict.problem, verdict.fit, confidence);
  const { parameterNames } = verdict.problem.statement;
  return Object.fromEntries(parameterNames.map((name, i) => [name, intervals[i]]));
}

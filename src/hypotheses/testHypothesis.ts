/**
 * Tests of statements about the coefficients: the flexible fit is compared with the statement along smooth modes, at
 * several levels of detail, by Hotelling's T² with the covariance of independent blocks.
 */

import type { FitResult } from '../documents/FitDocument.js';
import { UsageError } from '../errors.js';
import type { Model } from '../fields/CoefficientField.js';
import { studentQuantile } from '../numerics/special/student.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { compareLaws } from './compareLaws.js';
import { createConservativeStatement } from './conservativeStatement.js';
import { type Contrasts, measureContrasts } from './contrasts.js';
import {
  estimateFlexibly,
  type FlexibleEstimate,
  pickOccupancyNodes,
  type PlannedField,
} from './flexibleEstimate.js';
import { createIsotropyStatement } from './isotropyStatement.js';
import { judgeStatement, type Verdict } from './judgeStatement.js';
import { createLawStatement, type Law } from './lawStatement.js';
import { findOccupancyModes, type OccupancyModes } from './occupancyModes.js';
import { profileIntervals } from './profileIntervals.js';
import { resolveLawField } from './resolveLawField.js';
import { differenceSteps } from './readForce.js';
import type { Statement } from './Statement.js';
import { tabulatePlaces } from './tabulatePlaces.js';
import { createTemperatureStatement } from './temperatureStatement.js';
import type { HypothesisName, TestedParameter, TestResult } from './TestResult.js';
import { createUniformStatement } from './uniformStatement.js';
import { createZeroForceStatement } from './zeroForceStatement.js';

export interface TestRequest {
  readonly hypothesis: HypothesisName;
  /** Level of the verdict (rejected where p < 1 − confidence) and of every interval. */
  readonly confidence: number;
  readonly seed: number;
  /** What laws are about, with the hypothesis `law`: friction, noise_xx, diffusion, drift_x, … */
  readonly field?: string;
  /** One law to test, or several to compare. */
  readonly laws?: readonly Law[];
}

const NODES = 1000; // places that stand for the occupancy
const MODES = 8; // beyond those the parameters need

/**
 * Tests a hypothesis.
 *
 * @param fit  of the recording; its estimator, forms, blocks and visited region are used
 * @param tracks  the recording the fit was made from
 * @throws UsageError  where the hypothesis has no meaning for this fit
 * @throws DataError, NumericalError  as the estimator does
 */
export function testHypothesis(fit: FitResult, tracks: TrackSet, request: TestRequest): TestResult {
  const plan = planTest(fit, request);
  const flexible = estimateFlexibly(fit, tracks, plan.fields, plan.frictionForm);
  const nodes = pickOccupancyNodes(flexible.tracks, NODES);
  const statements = plan.createStatements(flexible.estimate.model, nodes);
  const most = Math.max(...statements.map(({ parameterNames }) => parameterNames.length)) + MODES;
  const modes = findOccupancyModes(flexible.basis, nodes, fit.visited, most);
  checkParameterCounts(statements, modes);
  const contrasts = measureContrasts(flexible.estimate, statements[0], nodes, modes);
  const verdicts = statements.map((statement) =>
    judgeStatement(statement, contrasts, nodes, modes, request.seed),
  );
  if (request.hypothesis === 'law') return describeLaws(fit, request, verdicts, contrasts);
  return describeVerdict(fit, request, verdicts[0], flexible, plan.note);
}

interface TestPlan {
  /** Coefficients that are estimated flexibly. */
  readonly fields: readonly PlannedField[];
  readonly frictionForm?: 'matrix';
  readonly note: string;
  createStatements(model: Model, nodes: Float64Array): Statement[];
}

function planTest(fit: FitResult, request: TestRequest): TestPlan {
  const { model, visited } = fit;
  const { hypothesis } = request;
  const d = model.dimensions;
  const second = model.order === 'second';
  const steps = differenceSteps(visited.low, visited.high);
  const needsSecond = (what: string): void => {
    if (second) return;
    throw new UsageError(
      `${hypothesis} needs a second-order fit, since ${what} is not identified at first order; fit again with --order second if velocities are resolved`,
      { hypothesis, order: 'first' },
    );
  };
  const forceFields: PlannedField[] = second ? ['force'] : ['force', 'noise'];
  const reading = second
    ? ''
    : ' (at first order: of the drift less the part gradients of diffusion bring about)';
  switch (hypothesis) {
    case 'uniform-friction':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      return {
        fields: ['friction'],
        note: 'the friction is the same everywhere',
        createStatements: (at) => [createUniformStatement(at, 'friction')],
      };
    case 'uniform-noise':
      return {
        fields: ['noise'],
        note: `the ${second ? 'noise' : 'diffusion'} is the same everywhere`,
        createStatements: (at) => [createUniformStatement(at, second ? 'noise' : 'diffusion')],
      };
    case 'uniform-temperature':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      return {
        fields: ['friction', 'noise'],
        note: 'noise and friction belong to one temperature: noise = 2 temperature × friction',
        createStatements: (at) => (at.order === 'second' ? [createTemperatureStatement(at)] : []),
      };
    case 'conservative-force':
      if (d === 1 && model.periods[0] === 0) {
        throw new UsageError(
          'conservative-force says nothing in one open dimension, where every force that depends on place alone has a potential; give --period to the fit if the axis closes on itself',
          { hypothesis },
        );
      }
      return {
        fields: forceFields,
        note: `the force has a potential${reading}`,
        createStatements: (at, nodes) => [createConservativeStatement(at, nodes, steps, visited)],
      };
    case 'zero-force':
      return {
        fields: forceFields,
        note: `there is no force${reading}`,
        createStatements: (at, nodes) => [createZeroForceStatement(at, nodes, steps)],
      };
    case 'isotropic-friction':
      needsSecond('friction');
      checkPresent(fit, 'friction');
      if (d === 1) {
        throw new UsageError('isotropic-friction needs at least two dimensions', { hypothesis });
      }
      return {
        fields: ['friction'],
        frictionForm: 'matrix',
        note: 'the friction is the same along every axis, with none across',
        createStatements: (at, nodes) => (at.order === 'second' ? [createIsotropyStatement(at, nodes)] : []),
      };
    case 'law': {
      const { field, laws = [] } = request;
      if (field === undefined || laws.length === 0) {
        throw new UsageError('the hypothesis law needs --field and at least one --law', { hypothesis });
      }
      const resolved = resolveLawField(model, field);
      for (const planned of resolved.fields) if (planned === 'friction') checkPresent(fit, 'friction');
      return {
        fields: resolved.fields,
        note: '',
        createStatements: () => laws.map((law) => createLawStatement(law, resolved.columns, d)),
      };
    }
  }
}

/** A coefficient that the study set to zero cannot be tested. */
function checkPresent(fit: FitResult, field: 'friction'): void {
  if (fit.study[field].trim() !== 'zero') return;
  throw new UsageError(`the fit was made with --${field} zero, so there is no ${field} to test; fit again`, {
    field,
  });
}

function checkParameterCounts(statements: readonly Statement[], modes: OccupancyModes): void {
  for (const { parameterNames, residualNames } of statements) {
    if (residualNames.length === 0 || parameterNames.length < modes.count * residualNames.length) continue;
    throw new UsageError(
      `a law with ${parameterNames.length} parameters (${parameterNames.join(', ')}) can follow any shape these data resolve; give fewer, or hold some with --fix`,
      { parameters: [...parameterNames] },
    );
  }
}

function describeVerdict(
  fit: FitResult,
  { hypothesis, confidence }: TestRequest,
  verdict: Verdict,
  _flexible: FlexibleEstimate,
  statement: string,
): TestResult {
  const { contrasts } = verdict.problem;
  const t = studentQuantile((1 + confidence) / 2, contrasts.blocks - 1);
  const reported = contrasts.reports.map(({ name, value, standardError }): [string, TestedParameter] => [
    name,
    { value, low: value - t * standardError, high: value + t * standardError },
  ]);
  const rejected = verdict.p < 1 - confidence;
  return {
    hypothesis,
    ...describeStatistic(verdict),
    confidence,
    rejected,
    parameters: { ...nameIntervals(verdict, confidence), ...Object.fromEntries(reported) },
    note: sayVerdict(statement, rejected, confidence),
    places: tabulatePlaces(verdict.problem, verdict.fit, fit.visited, fit.data.coordinates, confidence),
  };
}

function describeStatistic(
  verdict: Verdict,
): Pick<TestResult, 'statistic' | 'degrees' | 'p' | 'method' | 'levels' | 'blocks'> {
  const { strongest, levels, p, problem } = verdict;
  return {
    statistic: strongest.f,
    degrees: [strongest.between, strongest.within],
    p,
    method: 'theory',
    levels: levels.map((level) => ({
      modes: level.modes,
      f: level.f,
      degrees: [level.between, level.within],
      p: level.p,
    })),
    blocks: problem.contrasts.blocks,
  };
}

function nameIntervals(verdict: Verdict, confidence: number): Record<string, TestedParameter> {
  const intervals = profileIntervals(verdict.problem, verdict.fit, confidence);
  const { parameterNames } = verdict.problem.statement;
  return Object.fromEntries(parameterNames.map((name, i) => [name, intervals[i]]));
}

function sayVerdict(statement: string, rejected: boolean, confidence: number): string {
  const level = `${Number((100 * (1 - confidence)).toPrecision(3))} %`;
  return rejected
    ? `rejected at ${level}: the data contradict that ${statement}`
    : `not rejected at ${level}: the data are compatible with the statement that ${statement}, which does not prove it`;
}

function describeLaws(
  fit: FitResult,
  request: TestRequest,
  verdicts: readonly Verdict[],
  contrasts: Contrasts,
): TestResult {
  const { laws = [], confidence, field } = request;
  const detail = Math.max(...verdicts.map(({ problem }) => problem.modeCount));
  const problems = verdicts.map(({ problem }) => ({ ...problem, contrasts, modeCount: detail }));
  const scored = laws.length > 1 ? compareLaws(problems, confidence) : [];
  const order = scored.map((_, i) => i).sort((a, b) => scored[b].score - scored[a].score);
  const best = order[0] ?? 0;
  const verdict = verdicts[best];
  const law = laws[best];
  const rejected = verdict.p < 1 - confidence;
  return {
    hypothesis: 'law',
    field,
    law: law.name,
    formula: law.formula.text,
    ...describeStatistic(verdict),
    confidence,
    rejected,
    parameters: nameIntervals(verdict, confidence),
    note: sayVerdict(`${field} follows ${law.name}`, rejected, confidence),
    places: tabulatePlaces(verdict.problem, verdict.fit, fit.visited, fit.data.coordinates, confidence),
    ...(scored.length === 0
      ? {}
      : {
          comparison: order.map((i) => ({
            law: laws[i].name,
            formula: laws[i].formula.text,
            parameters: nameIntervals(verdicts[i], confidence),
            statistic: verdicts[i].strongest.f,
            p: verdicts[i].p,
            rejected: verdicts[i].p < 1 - confidence,
            ...scored[i],
          })),
        }),
  };
}

/**
 * Tests of statements about the coefficients: the flexible fit is compared with the statement along smooth modes, at
 * several levels of detail, by Hotelling's T² with the covariance of independent stretches of the recording.
 */

import type { FitResult } from '../documents/FitDocument.js';
import { UsageError } from '../errors.js';
import type { Estimate } from '../estimation/Estimate.js';
import type { Model } from '../fields/CoefficientField.js';
import { partOf, type ReportShare } from '../numerics/ReportShare.js';
import type { TrackSet } from '../tracks/TrackSet.js';
import { type Contrasts, measureContrasts } from './contrasts.js';
import { correctBias } from './correctBias.js';
import { describeLaws, describeVerdict, type JudgedVerdict } from './describeVerdicts.js';
import { estimateFlexibly, type FlexibleEstimate, pickOccupancyNodes } from './flexibleEstimate.js';
import { computeP, judgeStatement, type Verdict } from './judgeStatement.js';
import { findOccupancyModes, type OccupancyModes } from './occupancyModes.js';
import { planTest, type PlannedRequest, type TestPlan } from './planTest.js';
import { createConcentrationReader } from './readConcentration.js';
import { simulateP } from './simulateP.js';
import type { Statement } from './Statement.js';
import type { TestResult } from './TestResult.js';

export interface TestRequest extends PlannedRequest {
  /** Level of the verdict (rejected where p < 1 − confidence) and of every interval. */
  readonly confidence: number;
  readonly seed: number;
  /**
   * Simulates the recording under a model: same starts, frames and gaps, with the localization error per axis given.
   * Called where the recording is too small for theory, and where it is close; without it theory has to do.
   */
  readonly simulate?: (model: Model, localizationError: readonly number[], index: number) => TrackSet;
  /** How many are simulated; default 99: p-values in steps of 0.01. */
  readonly simulations?: number;
  /** Is told how much is done: first of the test itself, then, where it comes to that, of the simulations. */
  readonly onProgress?: (done: number, total: number) => void;
}

const NODES = 1000; // places that stand for the occupancy
const MODES = 8; // beyond those the parameters need
const SIMULATIONS = 99;
const ESTIMATE_SHARE = 0.7; // of the time of a trial: the flexible fit
// Between these a bias that theory does not know of could decide.
const CLEARLY_TRUE = 0.15;
const CLEARLY_FALSE = 1e-5;
const BIAS_SIMULATIONS = 8;
const FEW_BLOCKS = 30; // below this the covariance is too rough for Hotelling's law to be trusted

/**
 * Tests a hypothesis.
 *
 * @param fit  of the recording; its shapes, forms and visited region are used
 * @param tracks  the recording the fit was made from
 * @throws UsageError  where the hypothesis has no meaning for this fit
 * @throws DataError, NumericalError  as the estimators do
 *
 * Cost  one likelihood fit and 2 p evaluations of the model; nine times that where it is close, a hundred times for small
 * recordings.
 *
 * @example
 * const result = testHypothesis(fit, tracks, { hypothesis: 'zero-force', confidence: 0.95, seed: 1 });
 * console.log(result.rejected, result.method); // → true theory
 */
export function testHypothesis(fit: FitResult, tracks: TrackSet, request: TestRequest): TestResult {
  const plan = planTest(fit, request);
  const tell = request.onProgress;
  const trial = runTrial(fit, tracks, plan, tell && ((share) => tell(share, 1)));
  const judged = trial.verdicts.map((verdict, which) => settle(verdict, which, fit, request, plan, trial));
  return request.hypothesis === 'law'
    ? describeLaws(fit, request, judged)
    : describeVerdict(fit, request, judged[0], plan.statement);
}

/** Flexible fit and verdicts of one recording. */
interface Trial {
  readonly flexible: FlexibleEstimate;
  readonly nodes: Float64Array;
  readonly verdicts: readonly Verdict[];
}

function runTrial(fit: FitResult, tracks: TrackSet, plan: TestPlan, onProgress?: ReportShare): Trial {
  const tellEstimate = partOf(onProgress, 0, ESTIMATE_SHARE);
  const flexible = estimateFlexibly(fit, tracks, plan.fields, plan.frictionForm, {
    onProgress: tellEstimate,
  });
  const nodes = pickOccupancyNodes(flexible, NODES);
  const statements = plan.createStatements(
    flexible.estimate.model,
    nodes,
    createConcentrationReader(flexible),
  );
  const most = Math.max(...statements.map(({ parameterNames }) => parameterNames.length)) + MODES;
  const modes = findOccupancyModes(flexible.basis, nodes, fit.visited, most);
  checkParameterCounts(statements, modes);
  const contrasts = measureContrasts(flexible.estimate, statements[0], nodes, modes);
  const verdicts = statements.map((statement) => judgeStatement(statement, contrasts, nodes, modes));
  return { flexible, nodes, verdicts };
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

/**
 * The verdict with the p-value that counts: by simulation where stretches are few, otherwise by theory, with the bias
 * taken off where it is close.
 */
function settle(
  verdict: Verdict,
  which: number,
  fit: FitResult,
  request: TestRequest,
  plan: TestPlan,
  { flexible, nodes }: Trial,
): JudgedVerdict {
  const { simulate, seed } = request;
  const { contrasts, statement, modes } = verdict.problem;
  if (simulate !== undefined && contrasts.blocks < FEW_BLOCKS) {
    const { model, localizationError } = flexible.estimate;
    const imposed = statement.impose(model, verdict.fit.parameters, nodes);
    const errors = localizationError.map(({ value }) => value);
    const p = simulateP(
      verdict.strongest.p,
      (index) => runTrial(fit, simulate(imposed, errors, index), plan).verdicts[which].strongest.p,
      request.simulations ?? SIMULATIONS,
      request.onProgress,
    );
    return { ...verdict, p, method: 'simulation' };
  }
  const p = computeP(verdict, seed);
  const isClose = p < CLEARLY_TRUE && p > CLEARLY_FALSE;
  const corrected = isClose ? takeOffBias(verdict, fit, request, plan, flexible) : null;
  if (corrected === null) return { ...verdict, p, method: 'theory' };
  const again = judgeStatement(statement, corrected, nodes, modes);
  return { ...again, p: computeP(again, seed), method: 'corrected' };
}

/**
 * Contrasts less the bias of recordings simulated under the statement. What else is simulated is a smooth estimate: the
 * chance waves of the flexible one would be flattened, friction and noise not alike.
 *
 * @returns null where nothing can be simulated
 */
function takeOffBias(
  { problem, fit: { parameters } }: Verdict,
  fit: FitResult,
  { simulate, onProgress }: TestRequest,
  plan: TestPlan,
  { tracks }: FlexibleEstimate,
): Contrasts | null {
  if (simulate === undefined) return null;
  const estimate = (recording: TrackSet, smooth: boolean): Estimate =>
    estimateFlexibly(fit, recording, plan.fields, plan.frictionForm, { pointOnly: true, smooth }).estimate;
  const { model, localizationError } = estimate(tracks, true);
  const imposed = problem.statement.impose(model, parameters, problem.nodes);
  const errors = localizationError.map(({ value }) => value);
  return correctBias(
    problem,
    imposed,
    (index) => estimate(simulate(imposed, errors, index), false).model,
    BIAS_SIMULATIONS,
    onProgress,
  );
}

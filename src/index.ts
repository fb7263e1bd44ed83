/**
 * The library: everything the program does, without files, streams or clock. Grouped by stage.
 */

// errors and units
export {
  DataError,
  NumericalError,
  UsageError,
  WanderlawError,
  type ErrorFacts,
  type Warning,
} from './errors.js';
export { formatUnit, NO_UNITS, QUANTITY_POWERS, type Quantity, type Units } from './units.js';

// documents
export { type FitDocument, fitSchema } from './documents/FitDocument.js';
export { describeDocuments, type DocumentName } from './documents/jsonSchemas.js';
export { parseFit } from './documents/parseFit.js';
export { completeStudy, parseStudyInput } from './documents/parseStudy.js';
export { type Scenario, type ScenarioInput, scenarioSchema } from './documents/Scenario.js';
export { type Study, type StudyInput, studySchema } from './documents/Study.js';

// tracks
export { formatTrackTable } from './import/formatTracks.js';
export {
  importTracks,
  type ImportCounts,
  type ImportOptions,
  type ImportResult,
  type TrackSource,
} from './import/importTracks.js';
export { countPositions, countTracks, type TrackSet } from './tracks/TrackSet.js';
export { checkTrackLengths, selectTracks } from './tracks/usableTracks.js';

// survey and momenta
export type { Survey } from './momenta/Survey.js';
export { surveyTracks } from './momenta/surveyTracks.js';

// fit
export { fitTracks, type FitContext, type FitResult } from './fit.js';

// coefficients
export type {
  CoefficientField,
  FieldForm,
  FieldLink,
  FieldName,
  Model,
  ModelEvaluator,
} from './fields/CoefficientField.js';
export { createModelEvaluator } from './fields/evaluateModel.js';
export { evaluateFit, type EvaluatedColumn } from './uncertainty/evaluateFit.js';

// statements about coefficients, and about the model itself
export { type Formula, type FormulaReader, loadFormulaReader } from './fields/formula.js';
export type { ChallengeResult } from './hypotheses/challenge/ChallengeResult.js';
export { challengeModel } from './hypotheses/challenge/challengeModel.js';
export type { Law } from './hypotheses/lawStatement.js';
export { type NamedLaw, NAMED_LAWS } from './hypotheses/namedLaws.js';
export { type LawContext, resolveLaws } from './hypotheses/resolveLaw.js';
export { testHypothesis, type TestRequest } from './hypotheses/testHypothesis.js';
export type { HypothesisName, TestResult } from './hypotheses/TestResult.js';

// simulation and checks
export { mapTasksSerially, type MapTasks, type Task } from './numerics/MapTasks.js';
export { RandomStream, randomStream } from './numerics/random/RandomStream.js';
export { createRecorder } from './checks/createRecorder.js';
export { createRefit } from './checks/createRefit.js';
export type { Region } from './checks/Region.js';
export { resimulate, type ResimulationOptions } from './checks/resimulate.js';
export type { ResimulationResult } from './checks/ResimulationResult.js';
export type { Standing } from './documents/Scenario.js';
export { assessStanding } from './simulation/assessStanding.js';
export { buildFirstOrderScenario } from './simulation/buildFirstOrderScenario.js';
export { buildScenario } from './simulation/buildScenario.js';
export { createScenario, parseScenario } from './simulation/parseScenario.js';
export {
  simulateScenario,
  type SimulationOptions,
  type SimulationResult,
} from './simulation/simulateScenario.js';

// report
export type { Figure } from './report/figure.js';
export { composeFigure } from './report/figureFile.js';
export { drawReport, renderReport } from './report/renderReport.js';
export type { ReportedChallenge, ReportedTest, ReportInput } from './report/ReportInput.js';
export {
  formatChallengeSummary,
  formatFitSummary,
  formatResimulationSummary,
  formatSurveySummary,
  formatTestSummary,
} from './report/terminal.js';
